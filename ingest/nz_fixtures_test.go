package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// nzSample is what goes into an invented component of a New Zealand file. Place
// and earthquake do not exist.
type nzSample struct {
	corrected bool
	component string
	azimuth   int
	step      float64
	x         []float64 // in units of factor mm/s²
	factor    float64
	form      string // of the samples, "%8.1f"
	unlocated bool
}

func (s nzSample) text() []string {
	const id = "20410305_041512_QZTB_20"
	title, filter, others := "Uncorrected", "unfiltered", "not evaluated"
	if s.corrected {
		title, filter, others = "Corrected", "Band-pass filtered from 0.10 Hz to 40.00 Hz", "peak 12.0 mm/s at 0.500 s"
	}
	peak, at := peakOf(s.x)
	n := len(s.x)
	return []string{
		title + " accelerogram " + id + "      Invented Agency", "Site QZTB   41 12 30S 174 30 15E", "Quartz Bay Reserve",
		"Instrument QX-3 serial 42", "Resolution 24 bits   Natural period 0.020 s   Damping 0.70",
		id + "   Processed 2041 March 06", "Cape Plover, 24 km north of Quartz Bay", "2041 March 05 041506.4 UT",
		"Epicentre 41 00 00S 174 36 00E   Bearing 19 deg   Distance 24 km   Depth 12 km   M 5.70",
		fmt.Sprintf("Number of points %d   Duration %.3f s", n, float64(n-1)*s.step),
		fmt.Sprintf("Data in units of %.2f mm/s/s at intervals of %.4f s", s.factor, s.step),
		filter, "Component " + s.component,
		fmt.Sprintf("Peak acceleration %.1f mm/s/s at %.3f s   RMS 100.0 mm/s/s", float64(peak*s.factor), float64(at)*s.step),
		"Velocity " + others, "Displacement not evaluated",
	}
}

func (s nzSample) lines() []string {
	ints := make([]int, 40)
	for i, v := range map[int]int{1: 2041, 2: 3, 3: 5, 4: 4, 5: 15, 6: 64, 9: 2041, 10: 3, 19: 5, 20: 4, 39: 15, 40: 9250,
		11: 41, 14: 174, 15: 36, 17: 12, 21: 41, 22: 12, 23: 30, 24: 174, 25: 30, 26: 15, 27: 166, 28: s.azimuth,
		29: 199, 30: 24, 31: len(s.x), 34: len(s.x)} {
		ints[i-1] = v
	}
	if s.unlocated {
		for i := range 18 {
			if i != 8 && i != 9 {
				ints[i] = 0
			}
		}
		ints[29] = 0
	}
	if s.corrected {
		ints[34], ints[35] = len(s.x), len(s.x)
	}
	reals := make([]float64, 60)
	reals[0], reals[1] = 50, 0.7
	lines := append(s.text(), integers(ints, 8, 10)...)
	if s.unlocated {
		lines[6], lines[7], lines[8] = "", "", ""
	}
	lines = append(lines, fixed(reals, "%8.3f", 10, false)...)
	lines = append(lines, fixed(s.x, s.form, 10, false)...)
	if s.corrected {
		other := ring(len(s.x), 12, 1.99, 0.995) // any numbers: the reader passes over them
		lines = append(append(lines, fixed(other, "%8.3f", 10, false)...), fixed(other, "%8.4f", 10, false)...)
	}
	return lines
}

// The invented components that the fixtures hold. Samples of -1000.00 and below
// fill their fields.
var (
	nzRaw = []nzSample{
		{component: "S14E", azimuth: 166, step: 0.005, x: ring(194, 2080.5, 1.8, 0.98), factor: 1, form: "%8.1f"},
		{component: "N76E", azimuth: 76, step: 0.005, x: ring(194, -1320.5, 1.7, 0.97), factor: 1, form: "%8.1f"},
		{component: "Up", azimuth: 999, step: 0.005, x: ring(194, 640.5, 1.6, 0.96), factor: 1, form: "%8.1f"},
	}
	nzCorrected = []nzSample{
		{corrected: true, component: "N14W", azimuth: 346, step: 0.02, x: ring(130, -4180.25, 1.9, 0.99), factor: 0.5, form: "%8.2f", unlocated: true},
		{corrected: true, component: "S76W", azimuth: 256, step: 0.02, x: ring(130, 1320.5, 1.7, 0.97), factor: 0.5, form: "%8.2f", unlocated: true},
		{corrected: true, component: "Vertical", azimuth: 0, step: 0.02, x: ring(130, 640.5, 1.6, 0.96), factor: 0.5, form: "%8.2f", unlocated: true},
	}
)

func nzFile(samples []nzSample) []string {
	var lines []string
	for _, s := range samples {
		lines = append(lines, s.lines()...)
	}
	return lines
}

// nzFixtures are the files under testdata/records/new-zealand.
func nzFixtures(t testing.TB) []ringFixture {
	const format = "new-zealand"
	raw := nzFile(nzRaw)
	corrected := nzFile(nzCorrected)
	two := nzFile(nzRaw[:2])
	for i, line := range two { // another site, so that it is another record
		two[i] = strings.ReplaceAll(line, "QZTB", "QZTC")
	}
	for i, line := range corrected {
		corrected[i] = strings.ReplaceAll(line, "QZTB", "QZTD")
	}
	page := append(append([]string(nil), raw...), "<html><body>503 Service Unavailable</body></html>")
	return []ringFixture{
		{format, "uncorrected.v1a", raw, "\r\n"},
		{format, "corrected.v2a", corrected, "\n"},
		{format, "two-components.v1a", two, "\n"},
		{format, "damaged-truncated.v1a", raw[:120], "\n"},
		{format, "damaged-count.v1a", edit(t, raw, 20, "       0     194", "       0     184"), "\n"},
		{format, "damaged-unit.v1a", edit(t, raw, 11, "mm/s/s", "g"), "\n"},
		{format, "damaged-overflow.v1a", edit(t, raw, 30, raw[29][8:16], "********"), "\n"},
		{format, "damaged-page-appended.v1a", page, "\n"},
	}
}
