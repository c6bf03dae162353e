package ingest

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

// realFolder returns the folder of real Californian files, which are not part
// of the project; without it the test is skipped.
func realFolder(t testing.TB) string {
	t.Helper()
	dir := filepath.Join("..", "..", "shared", "records", "csmip")
	if _, err := os.Stat(dir); err != nil {
		t.Skipf("real records are not at hand: %v", err)
	}
	return dir
}

// realFiles returns the real files with the given ending.
func realFiles(t testing.TB, ending string) []string {
	t.Helper()
	files, err := filepath.Glob(filepath.Join(realFolder(t), "*", "*"+ending))
	if err != nil || len(files) == 0 {
		t.Fatalf("no %s files: %v", ending, err)
	}
	return files
}

func readFile(t testing.TB, path string) []byte {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

// TestRealV2 reads the real corrected accelerograms and compares with what their
// own text lines print, which the reader does not use: the peak to its printed
// digits.
func TestRealV2(t *testing.T) {
	folders := map[string]struct {
		siting  Siting
		station string
		start   string
		step    float64
		count   int
	}{
		"capemendocino": {SitingFreeField, "89324", "1986-11-21T23:33:12.6Z", 0.02, 1101},
		"mammothlakes":  {SitingFreeField, "54730", "2007-06-12T07:23:37.7Z", 0.005, 10064},
		"ferndale":      {SitingGround, "89324", "2015-01-28T21:08:38Z", 0.01, 8511},
		"berkeley":      {SitingStructure, "58658", "2018-01-04T10:39:22Z", 0.005, 12600},
	}
	files := realFiles(t, ".V2")
	if len(files) != 12 {
		t.Errorf("%d real V2 files, want 12", len(files))
	}
	for _, path := range files {
		name, _, _ := strings.Cut(filepath.Base(filepath.Dir(path)), "_")
		want := folders[name]
		data := readFile(t, path)
		format, channels, err := Parse(t.Context(), path, data, Hints{})
		if err != nil || format != "california-v2" || len(channels) != 1 {
			t.Errorf("Parse(%s) = %s, %d channels, %v", path, format, len(channels), err)
			continue
		}
		c := channels[0]
		if c.Siting != want.siting || c.Station.Code != want.station || c.Station.Network != "CE" ||
			c.StepS != want.step || len(c.Acceleration) != want.count || c.Processing != ProcessingCorrected {
			t.Errorf("%s: %s %s.%s dt %g s, %d values, %s; want %+v", path, c.Siting, c.Station.Network,
				c.Station.Code, c.StepS, len(c.Acceleration), c.Processing, want)
		}
		if got := c.Start.Format(time.RFC3339Nano); got != want.start {
			t.Errorf("%s: start %s, want %s", path, got, want.start)
		}
		if len(c.Warnings) > 0 {
			t.Errorf("%s: warnings %q", path, c.Warnings)
		}
		comparePrintedPeak(t, path, data, &c)
	}
}

// comparePrintedPeak compares the largest sample with text line 18, "Peak
// acceleration =   -29.715    cm/sec/sec", and its time.
func comparePrintedPeak(t *testing.T, path string, data []byte, c *Channel) {
	t.Helper()
	line := string(bytes.Split(data, []byte("\n"))[17])
	fields := strings.Fields(line[strings.Index(line, "=")+1:])
	want, err := strconv.ParseFloat(fields[0], 64)
	if err != nil {
		t.Fatal(err)
	}
	at := 0
	for i, a := range c.Acceleration {
		if math.Abs(a) > math.Abs(c.Acceleration[at]) {
			at = i
		}
	}
	if got := c.Acceleration[at] * 100; math.Abs(got-want) > 0.0005001 {
		t.Errorf("%s: largest sample %.5f cm/s², want %.3f", path, got, want)
	}
	if got := c.HeaderPeak.Value * 100; math.Abs(got-want) > 0.0005001 {
		t.Errorf("%s: header peak %.5f cm/s², want %.3f", path, got, want)
	}
	when, err := strconv.ParseFloat(fields[3], 64)
	if err != nil {
		t.Fatal(err)
	}
	// Old files count time from the first sample, as the index does.
	if got := float64(at) * c.StepS; math.Abs(got-when) > c.StepS+0.0005 {
		t.Errorf("%s: peak at %.3f s, want %.3f s", path, got, when)
	}
}

func TestRealV2Descriptions(t *testing.T) {
	dir := realFolder(t)
	read := func(parts ...string) Channel {
		path := filepath.Join(append([]string{dir}, parts...)...)
		_, channels, err := Parse(t.Context(), path, readFile(t, path), Hints{})
		if err != nil {
			t.Fatal(err)
		}
		return channels[0]
	}
	old := read("capemendocino_21nov1986_ce89324p", "CHAN12.V2")
	if e := old.Event; e.Name != "CAPE MENDOCINO EARTHQUAKE" || e.Origin.Format(time.RFC3339Nano) != "1986-11-21T23:33:01.8Z" ||
		e.Latitude != Known(40.364) || e.Longitude != Known(-124.433) || e.DepthKM != Known(17) ||
		e.Magnitude != Known(5.1) || e.MagnitudeType != "ML" || !e.Date.IsZero() {
		t.Errorf("event = %+v", e)
	}
	if s := old.Station; s.Name != "RIO DELL - 101/PAINTER ST. OVERPASS" || s.Latitude != Known(40.503) || s.Longitude != Known(-124.1) {
		t.Errorf("station = %+v", s)
	}
	if old.ChannelCode != "12" || old.Instrument != "FREE FIELD" || old.Orientation.AzimuthDeg != Known(270) ||
		old.LowCutHz != Known(0.8) || old.HighCutHz != Known(23) {
		t.Errorf("channel = %+v", old.Orientation)
	}
	new := read("berkeley_04jan2018_72948801_ce58658p", "CHAN006.V2")
	if new.Event.Name != "" || !new.Event.Origin.IsZero() || new.Event.Magnitude.Known {
		t.Errorf("event = %+v, want nothing known", new.Event)
	}
	if new.Station.Name != "Hayward - Hwy 580/238 Interchange Bridge" || new.Station.Latitude != Known(37.6907) {
		t.Errorf("station = %+v", new.Station)
	}
	if o := new.Orientation; o.Axis != AxisHorizontal || o.AzimuthDeg.Known || o.Order != 1 || o.Label != "Long" || new.ChannelCode != "6" {
		t.Errorf("orientation = %+v of channel %s", o, new.ChannelCode)
	}
}

// TestRealV2Together reads the channels of each earthquake from one file, as the
// network also distributes them, and expects the channels of the single files.
func TestRealV2Together(t *testing.T) {
	folders := map[string][]string{}
	for _, path := range realFiles(t, ".V2") {
		folders[filepath.Dir(path)] = append(folders[filepath.Dir(path)], path)
	}
	for dir, paths := range folders {
		var together []byte
		var want []Channel
		for _, path := range paths {
			data := readFile(t, path)
			_, channels, err := Parse(t.Context(), path, data, Hints{})
			if err != nil {
				t.Fatal(err)
			}
			together, want = append(together, data...), append(want, channels...)
		}
		format, got, err := Parse(t.Context(), dir, together, Hints{})
		if err != nil || format != "california-v2" || len(got) != len(want) {
			t.Errorf("%s: Parse = %s, %d channels, %v, want %d", dir, format, len(got), err, len(want))
			continue
		}
		for i := range want {
			got[i].Line = want[i].Line
			if !reflect.DeepEqual(got[i], want[i]) {
				t.Errorf("%s: channel %d differs from that of its own file", dir, i+1)
			}
		}
	}
}

// TestRealV1Text makes an uncorrected channel of each real corrected one, whose
// text lines 2 to 14 are those of the uncorrected record, and expects the same
// description from them alone. The samples stay the corrected ones.
func TestRealV1Text(t *testing.T) {
	for _, path := range realFiles(t, ".V2") {
		data := readFile(t, path)
		_, channels, err := Parse(t.Context(), path, data, Hints{})
		if err != nil {
			t.Fatal(err)
		}
		want := channels[0]
		lines := bytes.Split(data, []byte("\n"))
		block := lines[45 : 46+(len(want.Acceleration)+7)/8]
		text := append(slices.Clone(lines[1:14]), block...)
		format, channels, err := Parse(t.Context(), path, bytes.Join(text, []byte("\n")), Hints{})
		if err != nil || format != "california-v1" || len(channels) != 1 {
			t.Errorf("%s: Parse = %s, %d channels, %v", path, format, len(channels), err)
			continue
		}
		got := channels[0]
		if !equalSeries(got.Acceleration, want.Acceleration) || got.StepS != want.StepS || got.Processing != ProcessingRaw {
			t.Errorf("%s: other samples, or dt %g s, %s", path, got.StepS, got.Processing)
		}
		// The numbers of the corrected file have more digits of the position.
		near := math.Abs(got.Station.Latitude.Value-want.Station.Latitude.Value) <= 0.0005001 &&
			math.Abs(got.Station.Longitude.Value-want.Station.Longitude.Value) <= 0.0005001
		got.Station.Latitude, got.Station.Longitude = want.Station.Latitude, want.Station.Longitude
		if !near || got.Station != want.Station || got.Event != want.Event || !got.Start.Equal(want.Start) ||
			got.ChannelCode != want.ChannelCode || got.Instrument != want.Instrument || got.Siting != want.Siting {
			t.Errorf("%s: described as %+v %+v %v, channel %s at %q", path, got.Station, got.Event, got.Start, got.ChannelCode, got.Instrument)
		}
		if !got.Orientation.same(want.Orientation) {
			t.Errorf("%s: orientation %+v, want %+v", path, got.Orientation, want.Orientation)
		}
	}
}

func TestRealV3IsSkipped(t *testing.T) {
	for _, path := range realFiles(t, ".V3") {
		format, _, err := Parse(t.Context(), path, readFile(t, path), Hints{})
		if not, ok := errors.AsType[*NotMotionError](err); !ok || format != "california-v2" || !strings.Contains(not.Reason, "spectra") {
			t.Errorf("Parse(%s) = %s, %v, want a NotMotionError", path, format, err)
		}
	}
}

func BenchmarkRealV2(b *testing.B) {
	data := readFile(b, realFiles(b, ".V2")[0])
	b.SetBytes(int64(len(data)))
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := Parse(b.Context(), "", data, Hints{}); err != nil {
			b.Fatal(err)
		}
	}
}
