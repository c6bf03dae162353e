package ingest

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// addFixtures seeds a fuzz target with all fixtures of a format.
func addFixtures(f *testing.F, format string) {
	f.Helper()
	entries, err := os.ReadDir(recordsDir(format))
	if err != nil {
		f.Fatal(err)
	}
	for _, e := range entries {
		if e.Name() != "README.md" {
			f.Add(readFile(f, filepath.Join(recordsDir(format), e.Name())))
		}
	}
}

// fuzzFormat holds one reader to what every reader owes on any bytes: no panic,
// an error of a known type that is in the file, channels that meet their
// invariants, the input untouched, and memory bounded by the size of the input.
func fuzzFormat(t *testing.T, reader Format, data []byte) { fuzzHinted(t, reader, data, Hints{}) }

// fuzzHinted is fuzzFormat with what the user states.
func fuzzHinted(t *testing.T, reader Format, data []byte, hints Hints) {
	before := bytes.Clone(data)
	var content *Content
	var channels []Channel
	var err error
	recognised := false
	used := allocated(func() {
		content, _ = newContent(t.Context(), data)
		if recognised = reader.Sniff(content) != ""; recognised {
			channels, err = reader.Parse(content, hints)
		}
	})
	checkAllocated(t, used, data)
	if !recognised {
		return
	}
	if !bytes.Equal(data, before) {
		t.Error("Parse changed its input")
	}
	if err != nil {
		var pe *ParseError
		var not *NotMotionError
		if !errors.As(err, &pe) && !errors.As(err, &not) {
			t.Fatalf("error of type %T: %v", err, err)
		}
		for _, pe := range parseErrors(err) {
			if pe.Line < 0 || pe.Line > content.Text.Len() {
				t.Fatalf("error in line %d of %d: %v", pe.Line, content.Text.Len(), err)
			}
		}
	}
	var several ChannelErrors
	if (err == nil) != (len(channels) > 0) && !errors.As(err, &several) {
		t.Fatalf("%d channels beside the error %v", len(channels), err)
	}
	for i := range channels {
		checkInvariants(t, &channels[i], content.Text.Len())
	}
}

// maxAllocated is how many bytes may be allocated for each of a file.
const maxAllocated = 64

// checkAllocated bounds the memory that reading took in all, whether it was held or
// not; 1 MiB is free.
func checkAllocated(t *testing.T, used uint64, data []byte) {
	t.Helper()
	if !raceDetector && used > 1<<20+uint64(len(data))*maxAllocated {
		t.Errorf("%d bytes allocated for %d bytes of a file", used, len(data))
	}
}

// checkInvariants looks at what Channel promises, as far as a reader answers
// for it; the rest is refused by check.
func checkInvariants(t *testing.T, c *Channel, lines int) {
	t.Helper()
	if !(c.StepS > 0) || math.IsInf(c.StepS, 0) || len(c.Acceleration) == 0 || !(c.UnitMPS2 > 0) || c.Unit == "" {
		t.Fatalf("dt %g s, %d values, unit %q of %g m/s²", c.StepS, len(c.Acceleration), c.Unit, c.UnitMPS2)
	}
	if c.Line < min(1, lines) || c.Line > lines {
		t.Fatalf("first sample in line %d of %d", c.Line, lines)
	}
	if az := c.Orientation.AzimuthDeg; az.Known && (c.Orientation.Axis != AxisHorizontal || az.Value < 0 || az.Value >= 360) {
		t.Fatalf("orientation %+v", c.Orientation)
	}
	if c.LowCutHz.Known && c.HighCutHz.Known && c.LowCutHz.Value >= c.HighCutHz.Value {
		t.Fatalf("corners %v, %v", c.LowCutHz, c.HighCutHz)
	}
	for i, a := range c.Acceleration {
		if math.IsNaN(a) {
			t.Fatalf("value %d is NaN", i+1)
		}
	}
	if err := check(c); err != nil {
		var pe *ParseError
		if !errors.As(err, &pe) {
			t.Fatalf("check: error of type %T: %v", err, err)
		}
		return
	}
	checkBelieved(t, c)
	for _, s := range []Siting{SitingUnknown, SitingFreeField, SitingGround, SitingStructure, SitingBorehole} {
		if c.Siting == s {
			return
		}
	}
	t.Fatalf("siting %q", c.Siting)
}

// checkBelieved looks at the quantities that check makes unknown beyond their
// limits.
func checkBelieved(t *testing.T, c *Channel) {
	t.Helper()
	if lat, lon := c.Station.Latitude, c.Station.Longitude; math.Abs(lat.Value) > 90 || math.Abs(lon.Value) > 180 || lat.Known != lon.Known {
		t.Fatalf("station at %v, %v", lat, lon)
	}
	if e := c.Event; math.Abs(e.Latitude.Value) > 90 || math.Abs(e.Longitude.Value) > 180 || math.Abs(e.Magnitude.Value) > 10 || e.DepthKM.Value > 800 {
		t.Fatalf("event %+v", e)
	}
	if c.Station.Vs30.Value > 10000 || c.DistanceKM.Value < 0 || c.Distances.EpicentralKM.Value < 0 {
		t.Fatalf("Vs30 %v, distances %v, %v", c.Station.Vs30, c.DistanceKM, c.Distances)
	}
}

// hugeV2 and hugeCosmos announce two thousand million values and hold a hundred.
func hugeV2(t testing.TB) []string {
	lines := edit(t, v2Bridge.lines(), 46, "96", "2000000000")
	lines = edit(t, edit(t, lines, 29, "   96", "    0"), 29, "   96", "    0")
	return edit(t, lines, 16, "96", "  ")
}

func hugeCosmos(t testing.TB) []string {
	return edit(t, cosmosBase.lines(), lineData, "     150", "2000000000")
}

func TestAnnouncedCountAllocatesNothing(t *testing.T) {
	for name, lines := range map[string][]string{"california-v2": hugeV2(t), "cosmos": hugeCosmos(t)} {
		data := []byte(strings.Join(lines, "\n"))
		var format string
		var err error
		used := allocated(func() { format, _, err = Parse(t.Context(), "f", data, Hints{}) })
		if err == nil || format != name || !strings.Contains(err.Error(), "announced 2000000000 values") {
			t.Errorf("Parse = %s, %v, want the announced count refused", format, err)
		}
		if used > 1<<20 {
			t.Errorf("%s: %d bytes allocated for %d bytes of text", name, used, len(data))
		}
	}
}

func FuzzCaliforniaV2(f *testing.F) {
	addFixtures(f, "californiav2")
	f.Add([]byte(strings.Join(hugeV2(f), "\n")))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, californiaV2{}, data) })
}

func FuzzCOSMOS(f *testing.F) {
	addFixtures(f, "cosmos")
	f.Add([]byte(strings.Join(hugeCosmos(f), "\n")))
	f.Fuzz(func(t *testing.T, data []byte) { fuzzFormat(t, cosmos{}, data) })
}
