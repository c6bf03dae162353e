package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// at2Sample is an invented file with a four-line header.
type at2Sample struct {
	component string
	quantity  string // line 3
	pair      string // line 4
	x         []float64
	form      string // of one number
	perLine   int
	short     bool // no zero before the point
}

func (s at2Sample) lines() []string {
	lines := []string{
		"STRONG MOTION DATABASE RECORD, INVENTED FOR TESTS",
		"Northwater, 3/4/2041, Cedar Hill, Dam Crest Road, " + s.component,
		s.quantity,
		s.pair,
	}
	return append(lines, fixed(s.x, s.form, s.perLine, s.short)...)
}

const at2Gravity = "ACCELERATION TIME SERIES IN UNITS OF G"

var (
	at2North = at2Sample{"000", at2Gravity, "NPTS=    197, DT=   .0100 SEC", ring(197, 0.213, 1.7, 0.97), "%15.7E", 5, true}
	at2East  = at2Sample{"090", at2Gravity, "NPTS=    197, DT=   .0100 SEC,", ring(197, -0.187, 1.75, 0.96), "%15.7E", 5, true}
	at2Up    = at2Sample{"UP", at2Gravity, "NPTS=    197, DT=   .0100 SEC", ring(197, 0.094, 1.5, 0.95), "%15.7E", 5, true}
	at2Old   = at2Sample{"230", "ACCELERATION TIME HISTORY IN UNITS OF CM/SEC/SEC. FILTER POINTS: HP=0.20 Hz LP=25.0 Hz",
		"   150    .0200    NPTS, DT", ring(150, -152.4, 1.7, 0.97), "%9.4f", 8, false}
)

// at2Fixtures are the files under testdata/records/at2.
func at2Fixtures(t testing.TB) []ringFixture {
	const format = "at2"
	north := at2North.lines()
	velocity := at2North
	velocity.quantity = "VELOCITY TIME SERIES IN UNITS OF CM/S"
	spectrum := []string{
		"STRONG MOTION DATABASE SPECTRUM, INVENTED FOR TESTS", north[1],
		"PSEUDO SPECTRAL ACCELERATION, DAMPING = .05", "FREQUENCY (HZ), PSA (G)",
	}
	for i := 1; i <= 12; i++ {
		spectrum = append(spectrum, fmt.Sprintf("%15.7E%15.7E", 0.5*float64(i), 0.4/float64(i)))
	}
	return []ringFixture{
		{format, "NWT_CDH000.AT2", north, "\n"},
		{format, "NWT_CDH090.AT2", at2East.lines(), "\r\n"},
		{format, "NWT_CDH-UP.AT2", at2Up.lines(), "\n"},
		{format, "NWT_CDH000.VT2", velocity.lines(), "\n"},
		{format, "NWT_CDH000.050", spectrum, "\n"},
		{format, "values-first.AT2", at2Old.lines(), "\r\n"},
		{format, "damaged-truncated.AT2", north[:30], "\n"},
		{format, "damaged-page-appended.AT2", append(append([]string(nil), north[:20]...), "<html><body>503 Service Unavailable</body></html>"), "\n"},
		{format, "damaged-page.AT2", []string{"<!DOCTYPE html>", "<html><body>404 Not Found</body></html>"}, "\n"},
		{format, "damaged-unit.AT2", edit(t, north, 3, "UNITS OF G", "UNITS OF COUNTS"), "\n"},
	}
}

// plainFixtures are the files under testdata/records/plain.
func plainFixtures(t testing.TB) []ringFixture {
	const format = "plain"
	ns, ew, ud := ring(160, 0.31, 1.7, 0.97), ring(160, -0.27, 1.75, 0.96), ring(160, 0.12, 1.5, 0.95)
	single := []string{
		"# Invented for tests.", "# event: 2041nwt", "# station: CDH9", "# component: 35",
		"# dt = 0.01 s", "# unit: g", "# magnitude: 5.7",
	}
	timed := []string{"time (s),acc (cm/s^2)"}
	three := []string{"t [s];NS [mg];EW [mg];UD [mg]"}
	rounded := []string{"% times of 300 samples a second, rounded to 1 ms", "Time    Acceleration(m/s2)"}
	for i := range ns {
		single = append(single, fmt.Sprintf("%.6f", ns[i]))
		timed = append(timed, fmt.Sprintf("%.3f,%.4f", 0.005*float64(i), 981*ew[i]))
		row := fmt.Sprintf("%.2f;%.3f;%.3f;%.3f", 0.02*float64(i), 1000*ns[i], 1000*ew[i], 1000*ud[i])
		three = append(three, strings.ReplaceAll(row, ".", ","))
		rounded = append(rounded, fmt.Sprintf("%8.3f %11.5f", float64(i)/300, 9.81*ud[i]))
	}
	return []ringFixture{
		{format, "one-column.txt", single, "\n"},
		{format, "time-value.csv", timed, "\r\n"},
		{format, "three-directions.csv", three, "\n"},
		{format, "rounded-times.txt", rounded, "\n"},
		{format, "damaged-missing-sample.csv", without(timed, 61, 61), "\n"},
		{format, "damaged-missing-value.csv", edit(t, timed, 42, timed[41][6:], "NaN"), "\n"},
		{format, "silent.txt", single[7:], "\n"},
	}
}
