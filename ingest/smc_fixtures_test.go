package ingest

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// smcSample is what goes into an invented SMC file. Place and earthquake do not
// exist.
type smcSample struct {
	title, component string
	station          string // "": Otter Mill School
	tilt, azimuth    int
	rate             float64
	x                []float64 // cm/s²
	comments         []string
	bare             bool // exponents without their letter
}

// smcField prints v as 1.2345E+0 or, bare, as 1.2345+0, in ten characters.
func smcField(v float64, bare bool) string {
	s := fmt.Sprintf("%.3E", v)
	mantissa, exponent, _ := strings.Cut(s, "E")
	letter := "E"
	if bare {
		letter = ""
	}
	return fmt.Sprintf("%10s", mantissa+letter+exponent[:1]+exponent[2:])
}

func (s smcSample) text() []string {
	peak, _ := peakOf(s.x)
	lines := []string{
		s.title, "BRACKEN FORK EARTHQUAKE", "*", "March 18, 2041 05:06:07 UTC",
		"Moment Mag= 6.1   Ms=          Ml= 5.9",
		fmt.Sprintf("station =%-36scomponent= %s", orElse(s.station, "OTTER MILL SCHOOL, CA"), s.component),
		fmt.Sprintf("epicentral dist =  23.4    pk acc = %8.2f", peak),
		"inst type=QX-1              data source = INVENTED", "*", "*", "*",
	}
	return lines
}

func (s smcSample) lines() []string {
	ints := make([]int, 48)
	for i := range ints {
		ints[i] = smcNullInteger
	}
	for i, v := range map[int]int{2: 2041, 3: 77, 4: 5, 5: 6, 6: 12, 7: 250, 8: 0, 12: 4711, 13: s.tilt, 14: s.azimuth,
		16: len(s.comments), 17: len(s.x), 18: 0} {
		ints[i-1] = v
	}
	reals := make([]float64, 50)
	for i := range reals {
		reals[i] = 1.7e38
	}
	high, low := 0.0, 0.0
	highAt, lowAt := 0, 0
	for i, v := range s.x {
		if v > high {
			high, highAt = v, i
		}
		if v < low {
			low, lowAt = v, i
		}
	}
	for i, v := range map[int]float64{2: s.rate, 3: 39.25, 4: -123.5, 5: 11, 6: 6.1, 8: 5.9, 11: 39.125, 12: -123.25, 13: 214,
		17: 23.4, 26: 0.25, 27: 35, 28: float64(highAt) / s.rate, 29: high, 30: float64(lowAt) / s.rate, 31: low} {
		reals[i-1] = v
	}
	lines := append(s.text(), integers(ints, 10, 8)...)
	lines = append(lines, fixed(reals, "%15.7E", 5, false)...)
	lines = append(lines, s.comments...)
	line := ""
	for i, v := range s.x {
		if line += smcField(v, s.bare); i%8 == 7 || i == len(s.x)-1 {
			lines = append(lines, line)
			line = ""
		}
	}
	return lines
}

// The invented components that the fixtures hold.
var (
	smcNorth = smcSample{title: "2 CORRECTED ACCELEROGRAM", component: "005", tilt: 90, azimuth: 5, rate: 200,
		x: ring(203, -187, 1.8, 0.98), comments: []string{"| Invented for tests.", "| Butterworth filter at 0.25 and 35 Hz"}}
	smcEast = smcSample{title: "2 CORRECTED ACCELEROGRAM", component: "S85E", tilt: 90, azimuth: 95, rate: 200,
		x: ring(203, 143, 1.75, 0.97), bare: true}
	smcUp = smcSample{title: "2 CORRECTED ACCELEROGRAM", component: "UP", tilt: 0, azimuth: 500, rate: 199.99,
		x: ring(203, 61, 1.6, 0.96), comments: []string{"| Start time: 03/18/2041, 05:06:12.250 UTC"}}
	smcRaw = smcSample{title: "1 UNCORRECTED ACCELEROGRAM", station: "LANTERN COVE LIBRARY, CA", component: "275", tilt: 90, azimuth: 275, rate: 100,
		x: ring(150, 88, 1.7, 0.97), comments: []string{"| Units: cm/s/s", "| Duration 1.5 sec"}}
)

// smcTimed is a record read off film: times in s and amplitudes in pairs.
func smcTimed() smcSample {
	s := smcRaw
	s.x = nil
	for i, v := range ring(60, 88, 1.7, 0.97) {
		s.x = append(s.x, math.Round(float64(0.011*float64(i))*1000)/1000, v)
	}
	s.comments = nil
	return s
}

// smcFixtures are the files under testdata/records/smc.
func smcFixtures(t testing.TB) []ringFixture {
	const format = "smc"
	north := smcNorth.lines()
	velocity, spectra := smcNorth, smcNorth
	velocity.title, spectra.title = "3 VELOCITY", "5 RESPONSE SPECTRA"
	page := append(append([]string(nil), north...), "<html><body>503 Service Unavailable</body></html>")
	return []ringFixture{
		{format, "north.smc", north, "\n"},
		{format, "east-bare-exponents.smc", smcEast.lines(), "\r\n"},
		{format, "up.smc", smcUp.lines(), "\r\n"},
		{format, "uncorrected.smc", smcRaw.lines(), "\n"},
		{format, "velocity.smc", velocity.lines(), "\n"},
		{format, "spectra.smc", spectra.lines()[:40], "\n"},
		{format, "damaged-truncated.smc", north[:40], "\n"},
		{format, "damaged-count.smc", edit(t, north, 14, "       203", "       200"), "\n"},
		{format, "damaged-unit.smc", edit(t, north, 28, "| Invented for tests.", "| Units: g"), "\n"},
		{format, "damaged-page-appended.smc", page, "\n"},
		{format, "damaged-null.smc", edit(t, north, 33, north[32][10:20], " 1.700E+38"), "\n"},
		{format, "damaged-uneven.smc", smcTimed().lines(), "\n"},
	}
}
