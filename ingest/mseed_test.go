package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"swaybook/ingest/miniseed/miniseedtest"
)

// mseedHints hold the metadata of the fixtures.
func mseedHints(t testing.TB) Hints {
	t.Helper()
	m, err := ReadMetadata(t.Context(), []string{recordsDir("miniseed")})
	if err != nil {
		t.Fatal(err)
	}
	return Hints{Metadata: m}
}

// stationHints hold metadata of HNE at TARN in which old is replaced.
func stationHints(t testing.TB, replace ...string) Hints {
	t.Helper()
	text := string(readFile(t, filepath.Join(recordsDir("miniseed"), "station.xml")))
	for i := 0; i < len(replace); i += 2 {
		if !strings.Contains(text, replace[i]) {
			t.Fatalf("no %q in the station metadata", replace[i])
		}
		text = strings.Replace(text, replace[i], replace[i+1], 1)
	}
	path := filepath.Join(t.TempDir(), "station.xml")
	writeFile(t, path, text)
	m, err := ReadMetadata(t.Context(), []string{path})
	if err != nil {
		t.Fatal(err)
	}
	return Hints{Metadata: m}
}

func writeFile(t testing.TB, path, text string) {
	t.Helper()
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}

func parseMiniSEED(t *testing.T, data []byte, hints Hints) []Channel {
	t.Helper()
	format, channels, err := Parse(t.Context(), "f.mseed", data, hints)
	if err != nil || format != "miniseed" {
		t.Fatalf("Parse = %q, %d channels, %v", format, len(channels), err)
	}
	return channels
}

// TestMiniSEEDCounts has ten counts whose scale can be followed by hand: their
// mean is 100, and 400 counts are 1 m/s².
func TestMiniSEEDCounts(t *testing.T) {
	r := mseedRecord("HNE", 0, 1)
	r.Samples = []float64{100, 102, 98, 104, 96, 100, 110, 90, 100, 100}
	want := []float64{0, 0.005, -0.005, 0.01, -0.01, 0, 0.025, -0.025, 0, 0}
	turned := make([]float64, len(want))
	for i, v := range want {
		turned[i] = 0 - v
	}
	for _, k := range []struct {
		value string
		want  []float64
	}{{"400", want}, {"-400", turned}} {
		c := parseMiniSEED(t, r.Series(2), stationHints(t, "<Value>200000<", "<Value>"+k.value+"<"))[0]
		if !equalSeries(c.Acceleration, k.want) || c.UnitMPS2 != 0.0025 || c.Unit != "counts" || c.StepS != 0.01 || c.Processing != ProcessingMeanRemoved {
			t.Errorf("sensitivity %s: %v m/s², unit %q of %g, step %g s, %s", k.value, c.Acceleration, c.Unit, c.UnitMPS2, c.StepS, c.Processing)
		}
		if negative := k.value[0] == '-'; negative != (len(c.Warnings) == 1) {
			t.Errorf("sensitivity %s: warnings %q", k.value, c.Warnings)
		}
	}
	// 400 counts for 1 cm/s², and for 1 g.
	for unit, scale := range map[string]float64{"CM/S**2": 0.01 / 400, "g": StandardGravity / 400} {
		hints := stationHints(t, "<Value>200000<", "<Value>400<", "m/s**2", unit)
		if c := parseMiniSEED(t, r.Series(2), hints)[0]; c.UnitMPS2 != scale || len(c.Warnings) != 1 {
			t.Errorf("input unit %s: a count of %g m/s², want %g; warnings %q", unit, c.UnitMPS2, scale, c.Warnings)
		}
	}
}

func TestMiniSEEDThreeChannels(t *testing.T) {
	channels := parseMiniSEED(t, mseedFixtures()["three-channels.mseed"], mseedHints(t))
	if len(channels) != 3 {
		t.Fatalf("%d channels, want 3", len(channels))
	}
	const passed = `other channels of the file were passed over: XX.TARN.00.HHZ: instrument code "H" is not that of an accelerometer`
	start := mseedStart.Add(70 * time.Millisecond)
	east, north, up := mseedSamples()
	for i, k := range []struct {
		code, warning string
		o             Orientation
		samples       []float64
		turn          float64
	}{
		{"HNE", "cut to the time that all channels of the instrument have: 7 samples before and 4 behind it",
			Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(90), Label: "E"}, east.Samples[7:596], 1},
		{"HNN", "cut to the time that all channels of the instrument have: 0 samples before and 4 behind it",
			Orientation{Axis: AxisHorizontal, AzimuthDeg: Known(0), Label: "N"}, north.Samples[:589], 1},
		{"HNZ", "cut to the time that all channels of the instrument have: 7 samples before and 0 behind it",
			Orientation{Axis: AxisVertical, Label: "Z"}, up.Samples[7:], 1},
	} {
		c := channels[i]
		station := Station{Network: "XX", Code: "TARN", Name: "Tarn Head", Latitude: Known(30.5), Longitude: Known(149.75), ElevationM: Known(212)}
		if c.Station != station || c.ChannelCode != k.code || c.Instrument != "00 HN" || c.Siting != SitingUnknown || c.Orientation != k.o || !c.Start.Equal(start) {
			t.Errorf("%s: %+v %q %q %s %+v %v", k.code, c.Station, c.ChannelCode, c.Instrument, c.Siting, c.Orientation, c.Start)
		}
		if want := []string{k.warning, passed}; !reflect.DeepEqual(c.Warnings, want) {
			t.Errorf("%s: warnings %q, want %q", k.code, c.Warnings, want)
		}
		if want := aboutMean(k.samples, k.turn/200000); !equalSeries(c.Acceleration, want) {
			t.Errorf("%s: other samples than were written", k.code)
		}
		if id, ok := RecordID(&c, "stem"); !ok || id != "20410304T081209_XX.TARN_00-hn" {
			t.Errorf("%s: RecordID = %s, %v", k.code, id, ok)
		}
	}
}

// aboutMean is (count - mean)·scale, the sum being exact for these counts.
func aboutMean(counts []float64, scale float64) []float64 {
	sum := 0.0
	for _, v := range counts {
		sum += v
	}
	out := make([]float64, len(counts))
	for i, v := range counts {
		out[i] = (v-sum/float64(len(counts)))*scale + 0
	}
	return out
}

func TestMiniSEEDBorehole(t *testing.T) {
	channels := parseMiniSEED(t, mseedFixtures()["borehole-version3.mseed"], mseedHints(t))
	for i, want := range []Orientation{
		{Axis: AxisHorizontal, AzimuthDeg: Known(37), Label: "1"},
		{Axis: AxisHorizontal, AzimuthDeg: Known(127), Label: "2"},
		{Axis: AxisVertical, Label: "Z"},
	} {
		c := channels[i]
		if c.Orientation != want || c.Siting != SitingBorehole || c.Instrument != "10 HN" || c.Station.ElevationM != Known(212) || c.StepS != 0.005 || len(c.Warnings) > 0 {
			t.Errorf("%s: %+v %s %q %+v step %g, warnings %q", c.ChannelCode, c.Orientation, c.Siting, c.Instrument, c.Station.ElevationM, c.StepS, c.Warnings)
		}
	}
	// A dip of 90° points down: the samples are turned to point up.
	want := aboutMean(mseedRecord("HNZ", 12, 30_000).Samples, -1.0/100000)
	if got := channels[2].Acceleration; !equalSeries(got, want) {
		t.Errorf("the vertical that is positive down: %g …, want %g …", got[:3], want[:3])
	}
}

// TestMiniSEEDUnits has floating-point numbers, with and without metadata.
func TestMiniSEEDUnits(t *testing.T) {
	data := mseedFixtures()["floats.mseed"]
	c := parseMiniSEED(t, data, Hints{Unit: "g", UnitFrom: "--unit", UnitForAll: true})[0]
	x := ring(600, 0.31, 1.72, 0.98)
	for i, v := range x {
		x[i] = float64(float32(v)) * StandardGravity
	}
	if !equalSeries(c.Acceleration, x) || c.Unit != "g" || c.Processing != ProcessingUnknown || c.Orientation.AzimuthDeg != Known(90) {
		t.Errorf("unit %q, %s, %+v, samples %g … %g", c.Unit, c.Processing, c.Orientation, c.Acceleration[1], x[1])
	}
	// What is stated holds for channels with metadata, which place them.
	floats := mseedRecord("HNE", 5.5, 900)
	floats.Encoding = encodedFloat32
	hints := mseedHints(t)
	const warning = "floating-point samples taken as mm/s2, which %s says; the station metadata cover the channel too, and their sensitivity is not used"
	for from, forAll := range map[string]bool{"--unit": true, "catalogue line 7": false} {
		hints.Unit, hints.UnitFrom, hints.UnitForAll = "mm/s2", from, forAll
		c := parseMiniSEED(t, floats.Series(2), hints)[0]
		if c.Unit != "mm/s2" || c.Station.Name != "Tarn Head" || c.Acceleration[7] != float64(float32(floats.Samples[7]))*0.001 {
			t.Errorf("%s: unit %q at %q, value %g", from, c.Unit, c.Station.Name, c.Acceleration[7])
		}
		if want := []string{fmt.Sprintf(warning, from)}; !reflect.DeepEqual(c.Warnings, want) {
			t.Errorf("%s: warnings %q, want %q", from, c.Warnings, want)
		}
	}
	// Counts are divided by the sensitivity, whether floats or not.
	hints.Unit, hints.UnitFrom, hints.UnitForAll = "Counts", "--unit", true
	integers := mseedRecord("HNE", 5.5, 900)
	for _, r := range []*miniseedtest.Record{&floats, &integers} {
		c := parseMiniSEED(t, r.Series(2), hints)[0]
		want := make([]float64, len(r.Samples))
		for i, v := range r.Samples {
			want[i] = float64(float32(v))
		}
		if c.Unit != "counts" || c.UnitMPS2 != 1.0/200000 || len(c.Warnings) > 0 || !equalSeries(c.Acceleration, aboutMean(want, 1.0/200000)) {
			t.Errorf("as counts: unit %q of %g, warnings %q", c.Unit, c.UnitMPS2, c.Warnings)
		}
	}
}

func TestMiniSEEDAlignment(t *testing.T) {
	shifted := mseedRecord("HNN", 0, 9000)
	shifted.Start = shifted.Start.Add(3 * time.Millisecond)
	pair := append(mseedRecord("HNE", 0, 9000).Series(3), shifted.Series(3)...)
	channels := parseMiniSEED(t, pair, mseedHints(t))
	if want := "samples 0.003000 s from those of HNN taken for simultaneous"; len(channels[0].Warnings) != 1 || channels[0].Warnings[0] != want || len(channels[1].Warnings) > 0 {
		t.Errorf("warnings %q and %q, want %q", channels[0].Warnings, channels[1].Warnings, want)
	}
	if !channels[0].Start.Equal(shifted.Start) || len(channels[0].Acceleration) != 600 || len(channels[1].Acceleration) != 600 {
		t.Errorf("starts %v and %v of %d and %d samples", channels[0].Start, channels[1].Start, len(channels[0].Acceleration), len(channels[1].Acceleration))
	}
	// The greatest sample of HNE is among its first, which HNN has not.
	short := later(mseedRecord("HNN", 0, 9000), 100)
	channels = parseMiniSEED(t, append(mseedRecord("HNE", 0, 9000).Series(3), short.Series(3)...), mseedHints(t))
	for i, n := range []int{600, 500} {
		if c := channels[i]; len(c.Acceleration) != n || len(c.Warnings) != 1 || c.Warnings[0] != "channels of the instrument cover different times, and were left so" {
			t.Errorf("%s: %d samples, warnings %q", c.ChannelCode, len(c.Acceleration), c.Warnings)
		}
	}
}

// TestMiniSEEDRemarks has what records say of themselves.
func TestMiniSEEDRemarks(t *testing.T) {
	r := mseedRecord("HNE", 0, 9000)
	r.Quality = 1 << 1
	clipped := parseMiniSEED(t, append(r.Series(2), "tail"...), mseedHints(t))[0].Warnings
	if want := []string{"records say that the digitiser clipped", "4 bytes behind the last record were not read"}; !reflect.DeepEqual(clipped, want) {
		t.Errorf("warnings %q, want %q", clipped, want)
	}
	r = mseedRecord("HNE", 0, 9000)
	twice := parseMiniSEED(t, append(r.Series(2), r.Series(3)...), mseedHints(t))[0]
	if want := []string{"600 samples are in two records, with the same values"}; !reflect.DeepEqual(twice.Warnings, want) || len(twice.Acceleration) != 600 {
		t.Errorf("warnings %q, want %q", twice.Warnings, want)
	}
	gains := "</InstrumentSensitivity><Stage number=\"1\"><StageGain><Value>150000</Value></StageGain></Stage>"
	told := parseMiniSEED(t, r.Series(2), stationHints(t, "</InstrumentSensitivity>", gains, "<SampleRate>100<", "<SampleRate>200<"))[0].Warnings
	if want := []string{"the stages' gains make 150000, the sensitivity is 200000", "records have 100 Hz, the station metadata say 200 Hz"}; !reflect.DeepEqual(told, want) {
		t.Errorf("warnings %q, want %q", told, want)
	}
}

// TestMiniSEEDRefusals compares whole messages.
func TestMiniSEEDRefusals(t *testing.T) {
	full := mseedHints(t)
	files := mseedFixtures()
	east := mseedRecord("HNE", 0, 9000)
	calibration := east
	calibration.Activity = 1
	faster := later(east, 300)
	faster.Samples, faster.Rate = faster.Samples[:100], 200
	two := bytes.Join([][]byte{earlier(east, 400).Series(2), later(earlier(east, 200), 250).Series(2), later(east, 410).Series(2)}, nil)
	nan := east
	nan.Encoding, nan.Samples = encodedFloat32, append([]float64{1, math.NaN()}, east.Samples...)
	dead := east
	dead.Samples = make([]float64, 50)
	unit := full
	unit.Unit, unit.UnitFrom = "g", "catalogue line 7"
	step := full
	step.StepS, step.StepFrom = 0.005, "catalogue line 7"
	floats, counts := Hints{Metadata: full.Metadata}, full
	counts.Unit, counts.UnitForAll = "counts", true
	covered := east
	covered.Encoding = encodedFloat32
	const say = "floating-point samples may be counts or an acceleration: say which with --unit"
	const needs = "f.mseed: counts need the sensitivity of XX.TARN.00.HNE at 2041-03-04T08:12:09.5Z: name a StationXML file that covers it (--metadata)"
	cases := []struct {
		name  string
		data  []byte
		hints Hints
		want  string
	}{
		{"truncated", files["damaged-truncated.mseed"], full, "f.mseed: record at byte 7168: truncated: its length is 512 bytes, 412 are there"},
		{"junk appended", files["damaged-junk-appended.mseed"], full, "f.mseed: record at byte 2048: no header of miniSEED"},
		{"gap", files["damaged-gap.mseed"], full, "f.mseed: XX.TARN.00.HNE: 50 samples are missing from 2041-03-04T08:12:12.5Z on"},
		{"two gaps", two, full, "f.mseed: XX.TARN.00.HNE: 50 samples are missing from 2041-03-04T08:12:11.5Z on, the first of 2 gaps"},
		{"overlap", files["damaged-overlap.mseed"], full, "f.mseed: XX.TARN.00.HNE: record at byte 1024: overlaps with the records before it, and sample 35 is -21793 there and -21794 here"},
		{"checksum", files["damaged-checksum.mseed"], full, "f.mseed: record at byte 0: checksum is b75723eb, the header says 59718947"},
		{"count", files["damaged-count.mseed"], full, "f.mseed: XX.TARN.00.HNE: record at byte 0: announced 65418 samples, found room for 721 in 448 bytes of encoding 11 (Steim-2)"},
		{"unit", files["damaged-wrong-unit.mseed"], full, `f.mseed: XX.TARN.00.HNV: input unit of the sensitivity: unknown unit "V"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
		{"no metadata", east.Series(2), Hints{}, needs},
		{"no metadata, a unit", east.Series(2), Hints{Unit: "g", UnitForAll: true}, needs},
		{"no such channel", files["damaged-unknown-station.mseed"], full, strings.Replace(needs, "TARN", "MERE", 1)},
		{"no epoch", east.Series(2), stationHints(t, "2040-01-01T00:00:00Z\"", "2041-04-01T00:00:00Z\"", "2040-01-01T00:00:00Z\"", "2041-04-01T00:00:00Z\""),
			needs + "; no epoch covers 2041-03-04T08:12:09Z: from 2041-04-01T00:00:00Z on"},
		{"floats", files["floats.mseed"], floats, "f.mseed: XX.FELL.00.HNE: " + say},
		{"floats with metadata", covered.Series(2), full, "f.mseed: XX.TARN.00.HNE: " + say},
		{"floats as counts", files["floats.mseed"], counts, strings.Replace(needs, "TARN", "FELL", 1)},
		{"unit of counts", east.Series(2), unit, "f.mseed: XX.TARN.00.HNE: the samples are counts, catalogue line 7 says g"},
		{"step", east.Series(2), step, "f.mseed: dt: the file says 0.01 s, catalogue line 7 says 0.005 s"},
		{"no sensitivity", east.Series(2), stationHints(t, "InstrumentSensitivity>", "InstrumentNothing>", "</InstrumentSensitivity>", "</InstrumentNothing>"), "f.mseed: XX.TARN.00.HNE: the station metadata give no sensitivity"},
		{"polynomial", east.Series(2), stationHints(t, "InstrumentSensitivity>", "InstrumentPolynomial>", "</InstrumentSensitivity>", "</InstrumentPolynomial>"), "f.mseed: XX.TARN.00.HNE: the station metadata give a polynomial, no sensitivity"},
		{"sensitivity of nothing", east.Series(2), stationHints(t, "<Value>200000<", "<Value>0<"), "f.mseed: XX.TARN.00.HNE: a sensitivity of 0 is no scale"},
		{"output", east.Series(2), stationHints(t, "<Name>counts<", "<Name>V<"), `f.mseed: XX.TARN.00.HNE: the sensitivity makes "V", not counts`},
		{"calibration", calibration.Series(2), full, "f.mseed: XX.TARN.00.HNE: records hold a calibration signal"},
		{"rate", append(earlier(east, 300).Series(2), faster.Series(2)...), full, "f.mseed: XX.TARN.00.HNE: the rate changes from 100 to 200 Hz at 2041-03-04T08:12:12.5Z"},
		{"not finite", nan.Series(2), full, "f.mseed: XX.TARN.00.HNE: value 2 is not finite"},
		{"dead", dead.Series(2), full, "f.mseed: samples: all 50 values are equal: a dead channel"},
		{"empty", nil, full, "f.mseed: file is empty"},
		{"full SEED", []byte("000001V 010009402.3121970,001,00:00:00.0000~2038,001~2041,063~XX~~"), full, "f.mseed: record at byte 0: full SEED: extract miniSEED and StationXML from it"},
	}
	for _, k := range cases {
		t.Run(k.name, func(t *testing.T) {
			_, channels, err := Parse(t.Context(), "f.mseed", k.data, k.hints)
			if _, ok := errors.AsType[*ParseError](err); !ok || err.Error() != k.want || len(channels) > 0 {
				t.Errorf("%d channels, error %v, want %q", len(channels), err, k.want)
			}
		})
	}
}

// TestMiniSEEDOneBadChannel loses one channel and keeps the other, whether the
// reader refuses it or the checks that all formats share.
func TestMiniSEEDOneBadChannel(t *testing.T) {
	dead := mseedRecord("HNE", 0, 1)
	dead.Samples = make([]float64, 600)
	north := mseedRecord("HNN", 0, 9000).Series(2)
	for name, k := range map[string]struct {
		data []byte
		want string
	}{
		"Steim": {mseedFixtures()["damaged-steim-of-one.mseed"],
			"f.mseed: XX.TARN.00.HNE: record at byte 512: damaged frames: they lead to the last sample 35241, which is said to be 35240"},
		"dead": {append(dead.Series(2), north...), "f.mseed: samples: channel HNE: all 600 values are equal: a dead channel"},
	} {
		_, channels, err := Parse(t.Context(), "f.mseed", k.data, mseedHints(t))
		var refused ChannelErrors
		if !errors.As(err, &refused) || len(refused) != 1 || err.Error() != k.want || len(channels) != 1 || channels[0].ChannelCode != "HNN" {
			t.Errorf("%s: %d channels, error %v, want %q", name, len(channels), err, k.want)
		}
	}
	_, channels, err := Parse(t.Context(), "f.mseed", mseedFixtures()["three-channels.mseed"], Hints{})
	if refused, ok := errors.AsType[ChannelErrors](err); !ok || len(refused) != 3 || len(channels) > 0 {
		t.Errorf("without metadata: %d channels, %v, want three refusals", len(channels), err)
	}
}

func TestMiniSEEDNotMotion(t *testing.T) {
	log := mseedRecord("LOG", 0, 1)
	log.Encoding = 0
	for name, k := range map[string]struct {
		data  []byte
		hints Hints
		want  string
	}{
		"instrument":           {mseedFixtures()["velocity.mseed"], mseedHints(t), `XX.TARN.00.HHZ: instrument code "H" is not that of an accelerometer`},
		"unit":                 {mseedRecord("HNE", 0, 9000).Series(2), stationHints(t, "m/s**2", "M/S"), "XX.TARN.00.HNE: its sensitivity is for M/S, not an acceleration"},
		"unit of displacement": {mseedRecord("HNE", 0, 9000).Series(2), stationHints(t, "m/s**2", "nm"), "XX.TARN.00.HNE: its sensitivity is for nm, not an acceleration"},
		"messages":             {log.Series(2), Hints{}, `XX.TARN.00.LOG: instrument code "O" is not that of an accelerometer`},
	} {
		_, _, err := Parse(t.Context(), "f", k.data, k.hints)
		if not, ok := errors.AsType[*NotMotionError](err); !ok || not.Reason != k.want {
			t.Errorf("%s: %v, want %q", name, err, k.want)
		}
	}
}

// FuzzMiniSEED reads with and without all that the hints can say.
func FuzzMiniSEED(f *testing.F) {
	addFixtures(f, "miniseed")
	known := mseedHints(f)
	known.Unit, known.UnitForAll = "g", true
	f.Fuzz(func(t *testing.T, data []byte) {
		fuzzFormat(t, miniSEED{}, data)
		fuzzHinted(t, miniSEED{}, data, known)
	})
}
