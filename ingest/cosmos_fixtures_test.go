package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// cosmosSample is what goes into an invented section. Places and earthquakes do
// not exist.
type cosmosSample struct {
	title, quantity       string // "Corrected acceleration", "acceleration"
	stage, kind, unitCode int
	unit                  string
	channel, code         int
	label, location       string
	step                  float64
	x                     []float64
	format, form          string // "(8F10.3)", "%10.3f"
	perLine               int
	low, high             float64
	realFormat, realForm  string
	realsPerLine          int
	microvolts, voltsPerG float64
	height                float64
	old                   bool // version 1.00
	peak                  float64
}

func (s cosmosSample) text() []string {
	version := "01.20"
	if s.old {
		version = "01.00"
	}
	filter := fmt.Sprintf("Filter: low corner    %5.2f Hz (period %6.2f s)       high corner  %5.2f Hz", s.low, 1/max(s.low, 0.01), s.high)
	if s.low == 0 {
		filter = "Unfiltered"
	}
	fifth := "Statn No: 99- 4711   Code:XQ-T4711  INV  Thistle Bend - Weir Road School"
	sixth := "Coords: 36.5000  -121.2500   Site geology: invented alluvium"
	if s.old {
		fifth = "Statn No: 99- 4711   Code:XQ-T4711  36.5000N, 121.2500W"
		sixth = ""
	}
	return []string{
		fmt.Sprintf("%-26s(Format v%s with 13 text lines)  Src: invented", s.title, version),
		fmt.Sprintf("%-40s%s", "Mallow Creek Earthquake", "March 3, 2019 21:15 PST"),
		"Hypocenter: 36.400   -121.100   H= 9km (INV)  ML=4.8  Mw=5.0",
		"Origin: 03/04/2019, 05:15:20.3 UTC (INV)",
		fifth, sixth,
		"Recorder: QX-1    s/n: 99    ( 3 Chns of  3 at Sta) Sensor: QA-2   s/n 17",
		"Rcrd start time:03/04/2019, 05:15:22.250 UTC (Q=5)        RcrdId: INV.99",
		fmt.Sprintf("Sta Chan %3d: %-8s (Rcrdr Chan %3d)        Location:%s", s.channel, s.label, s.channel, s.location),
		fmt.Sprintf("Raw record length = %7.3f sec, Uncor max = %9.3f", float64(len(s.x))*s.step, s.peak),
		"Processed: 03/05/2019 INV",
		filter,
		"Values used when parameter or data value is unknown/unspecified: -999, -999.0",
	}
}

func (s cosmosSample) headers() []string {
	ints, reals := make([]int, 100), make([]float64, 100)
	for i := range ints {
		ints[i], reals[i] = -999, -999
	}
	ints[0], ints[1], ints[2], ints[3], ints[7], ints[10] = s.stage, s.kind, s.unitCode, 120, 4711, 99
	ints[39], ints[40], ints[41], ints[42], ints[43], ints[44] = 2019, 63, 3, 4, 5, 15
	ints[49], ints[53] = s.channel, s.code
	reals[0], reals[1], reals[2], reals[3] = 36.5, -121.25, 212, 340
	reals[9], reals[10], reals[11], reals[12], reals[14] = 36.4, -121.1, 9, 5, 4.8
	reals[16] = 17.43
	reals[29], reals[33], reals[61], reals[62] = 22.25, s.step, s.step*1000, float64(len(s.x))*s.step
	reals[63] = s.peak
	reals[51] = s.height
	if s.low > 0 {
		reals[53], reals[56] = s.low, s.high
	}
	if s.microvolts > 0 {
		reals[21], reals[41], reals[46] = s.microvolts, s.voltsPerG, 1
	}
	if s.old {
		// Version 1.00 keeps other quantities in these places.
		ints, reals = make([]int, 100), make([]float64, 100)
		reals[61], ints[53], ints[1] = 77, 33, 2
	}
	equals := "="
	if s.old {
		equals = ""
	}
	reallines := (100 + s.realsPerLine - 1) / s.realsPerLine
	lines := []string{fmt.Sprintf(" 100 Integer-header values follow on  10 lines, Format%s (10I8)", equals)}
	lines = append(lines, integers(ints, 8, 10)...)
	lines = append(lines, fmt.Sprintf(" 100 Real-header values follow on %3d lines, Format%s %s", reallines, equals, s.realFormat))
	lines = append(lines, fixed(reals, s.realForm, s.realsPerLine, false)...)
	return append(lines, "   2 Comment line(s) follow, each starting with a \"|\":", "| Invented data: a ringing series, no earthquake.", "|")
}

func (s cosmosSample) data() []string {
	head := fmt.Sprintf("%8d %s pts, approx %4.0f secs, units=%s (%02d),Format=%s",
		len(s.x), s.quantity, float64(len(s.x))*s.step, s.unit, s.unitCode, s.format)
	if s.old {
		head = fmt.Sprintf("%8d %s pts, at %.0f pts/sec, units=%s, Format %s", len(s.x), s.quantity, 1/s.step, s.unit, s.format)
	}
	lines := append([]string{head}, fixed(s.x, s.form, s.perLine, false)...)
	return append(lines, fmt.Sprintf("End-of-data for Chan %3d %s", s.channel, s.quantity))
}

func (s cosmosSample) lines() []string { return append(append(s.text(), s.headers()...), s.data()...) }

// as returns the sample with another quantity, as in a file that carries the
// integrals beside the acceleration.
func (s cosmosSample) as(title, quantity, unit string, kind, code int) cosmosSample {
	s.title, s.quantity, s.unit, s.kind, s.unitCode = title, quantity, unit, kind, code
	s.x, s.peak = ring(len(s.x), 3.5, 1.9, 0.99), 3.5
	return s
}

var cosmosBase = cosmosSample{title: "Corrected acceleration", quantity: "acceleration", stage: 2, kind: 1, unitCode: 4, unit: "cm/sec2",
	channel: 1, code: 360, label: "360 deg", location: "Free field", step: 0.01, x: ring(150, -213.4, 1.7, 0.97),
	format: "(8F10.3)", form: "%10.3f", perLine: 8, low: 0.12, high: 45, realFormat: "(5F15.6)", realForm: "%15.6f", realsPerLine: 5,
	height: -999, peak: -213.4}

func cosmosVertical() cosmosSample {
	s := cosmosBase
	s.channel, s.code, s.label = 2, 400, "Up"
	s.x, s.peak = ring(150, 98.25, 1.6, 0.95), 98.25
	return s
}

// cosmosUncorrected is V1c in g, one value a line, with reals as 6F13.6.
func cosmosUncorrected() cosmosSample {
	s := cosmosBase
	s.title, s.stage, s.unitCode, s.unit = "Uncorrected acceleration", 1, 2, "g"
	s.code, s.label, s.location = 90, "90 deg", "Roof: North Edge"
	s.format, s.form, s.perLine, s.low = "(1E15.6 )", "%15.6E", 1, 0
	s.realFormat, s.realForm, s.realsPerLine = "(6F13.6)", "%13.6f", 6
	s.x, s.peak, s.height = ring(60, 0.2125, 1.5, 0.97), 0.2125, 12.5
	return s
}

// cosmosRaw is V0: counts about an offset of 1500, at 2.5 µV a count and 1.25 V/g.
func cosmosRaw() cosmosSample {
	s := cosmosBase
	s.title, s.stage, s.unitCode, s.unit = "Raw acceleration counts", 0, cosmosCounts, "counts"
	s.code, s.label, s.location, s.low = 700, "Long", "", 0
	s.format, s.form, s.perLine = "(10I8)", "%8.0f", 10
	s.x = ring(70, 81920, 1.5, 0.97)
	for i := range s.x {
		s.x[i] += 1500
	}
	s.peak, s.microvolts, s.voltsPerG = 83420, 2.5, 1.25
	return s
}

func cosmosOld() cosmosSample {
	s := cosmosBase
	s.old = true
	return s
}

// cosmosFixtures are the files under testdata/records/cosmos.
func cosmosFixtures(t testing.TB) []ringFixture {
	const format = "cosmos"
	base := cosmosBase.lines()
	quantities := append([]string(nil), base...)
	quantities = append(quantities, cosmosBase.as("Corrected velocity", "velocity", "cm/sec", 2, 5).lines()...)
	displacement := cosmosBase.as("Corrected displacement", "displacement", "cm", 3, 6)
	// The last section is a data line straight after an end line.
	quantities = append(quantities, displacement.data()...)
	spectra := append([]string(nil), cosmosBase.text()...)
	spectra[0] = strings.Replace(spectra[0], "Corrected acceleration", "Response spectra      ", 1)
	spectra = append(spectra, "  91 spectral values follow, which this file leaves out")
	return []ringFixture{
		{format, "corrected.v2c", quantities, "\r\n"},
		{format, "two-channels.v2c", append(append([]string(nil), base...), cosmosVertical().lines()...), "\n"},
		{format, "uncorrected.v1c", cosmosUncorrected().lines(), "\n"},
		{format, "raw-counts.v0", cosmosRaw().lines(), "\n"},
		{format, "version-1-00.v2c", cosmosOld().lines(), "\n"},
		{format, "spectra.v3c", spectra, "\n"},
		{format, "damaged-truncated.v2c", base[:60], "\n"},
		{format, "damaged-overflow.v2c", edit(t, base, 50, base[49][10:20], "**********"), "\n"},
		{format, "damaged-unit.v2c", edit(t, base, 49, "(04)", "(02)"), "\n"},
	}
}
