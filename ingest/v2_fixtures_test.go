package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// v2Sample is what goes into an invented V2 channel. Places, people and
// earthquakes do not exist.
type v2Sample struct {
	n, channel, station, direction int
	label                          string
	stationChannel                 int // 0: no "(Sta Chn: …)"
	location                       string
	step                           float64
	stepText                       string
	x                              []float64
	form                           string // of the acceleration, "%10.5f"
	old                            bool   // upper case, no formats
	low, high                      float64
	named                          bool // the earthquake has a name and an origin
}

func (s v2Sample) text() []string {
	peak, at := peakOf(s.x)
	direction := s.label
	if s.direction <= 360 {
		direction = fmt.Sprintf("%3d Deg", s.direction)
	}
	chn := ""
	if s.stationChannel > 0 {
		chn = fmt.Sprintf("(Sta Chn: %2d)", s.stationChannel)
	}
	id := fmt.Sprintf("%05d-Q0042-99123.01", s.station)
	name := "Fiddlers Gap - Route 7 Bridge"
	third, fourth := "Record of Sun Jun  6, 2027 04:05:06.5 PDT", "CSMIP Preliminary Processing            (Origin:  To be determined)"
	fifth := id + "                 Start time:  6/06/27, 11:05:06.5 UTC (GPS)"
	tenth := "Hypocenter:  To be determined.               ML:  To be determined."
	if s.named {
		third, fourth = "Larkspur Hollow Earthquake", "March 14, 1984  05:06 PST               (Origin(INV): 03/14/84, 13:06:07.8 GMT)"
		fifth = id + "               Trigger time: 03/14/84, 13:06:11.2 GMT"
		tenth = "Hypocenter(INV): 39.250N, 123.500W, H=11KM.      ML=5.4(INV), MW=5.6."
	}
	lines := []string{
		fmt.Sprintf("Corrected accelerogram   %-20s      Chan %2d: %-12sfrom", id, s.channel, direction),
		"Uncorrected Accelerogram Data             Processed: 06/07/27, CGS  invented",
		third, fourth, fifth,
		fmt.Sprintf("Station No. %05d   39.100N, 123.250W     QX-1   s/n   42 ( 3 Chns of  3 at Sta)", s.station),
		fmt.Sprintf("%-42sCGS   Data: Acceleration", name),
		fmt.Sprintf("Chan %2d: %-10s%-16sLocation: %s", s.channel, direction, chn, s.location),
		third, tenth,
		"Instr Period =  .0200 sec,  Damping =  .600,  Sensitivity = 1.25 v/g",
		fmt.Sprintf("                        Record length = %.3f sec.", float64(s.n)*s.step),
		"                                     Uncor Max  =   .100 g, at   1.000 sec.",
		"RMS accel of (uncor) record  =        .",
		fmt.Sprintf("Accelerogram bandpass filtered with 3 dB pts at %5.2f and %5.2f cyc/sec", s.low, s.high),
		fmt.Sprintf("%6d points of instrument- and baseline-corrected accel, veloc and displ data", s.n),
		fmt.Sprintf("At equally-spaced intervals of    %s  sec.", s.stepText),
		fmt.Sprintf("Peak acceleration = %9.3f    cm/sec/sec  at %8.3f   sec.", peak, float64(at)*s.step),
		"Peak   velocity   =     1.000      cm/sec    at    1.000   sec.",
		"Peak displacement =      .100        cm      at    1.000   sec.",
		"Initial velocity  =      .000   cm/sec;   Initial displacement =     .000   cm",
		third, "", fmt.Sprintf("%s      %s  CGChan %2d:", id, name, s.channel), direction,
	}
	if s.old {
		for i := range lines {
			lines[i] = fmt.Sprintf("%-80s", strings.ToUpper(lines[i]))
		}
	}
	return lines
}

func (s v2Sample) lines() []string {
	ints, reals := make([]int, 100), make([]float64, 100)
	peak, at := peakOf(s.x)
	ints[0], ints[26], ints[52], ints[63] = s.channel, s.direction, s.n, s.n
	if !s.old {
		ints[13] = s.station
		reals[28], reals[29] = 39.1, -123.25
	}
	reals[51], reals[60], reals[64], reals[65] = 980.665, s.step, float64(at)*s.step, peak
	reals[71], reals[72] = s.low, s.high
	realForm := "%10.6f"
	if s.old {
		realForm = "%10.3f"
	}
	lines := append(s.text(), integers(ints, 5, 16)...)
	var heading string
	for i, v := range reals {
		field := dropZero(fmt.Sprintf(realForm, v))
		if len(field) > 10 { // as many decimals as fit
			field = field[:10]
		}
		if heading += field; i%8 == 7 || i == len(reals)-1 {
			lines = append(lines, heading)
			heading = ""
		}
	}
	blocks := []struct{ word, unit, oldUnit, form string }{
		{"accel", "cm/sec2.", "CM/SEC/SEC", s.form}, {"veloc", "cm/sec. ", "CM/SEC", "%10.6f"}, {"displ", "cm.     ", "CM", "%10.7f"},
	}
	for i, b := range blocks {
		head := fmt.Sprintf("%6d points of %s data equally spaced at  %s sec, in %s (8f%s)", s.n, b.word, s.stepText, b.unit, strings.Trim(b.form, "%f"))
		if s.old {
			head = strings.ToUpper(fmt.Sprintf("%5d points of %s data equally spaced at  %s sec.  (units: %s)", s.n, b.word, s.stepText, b.oldUnit))
		}
		x := s.x
		if i > 0 {
			x = ring(s.n, 1, 1.99, 0.995) // any numbers: the reader passes over them
		}
		lines = append(append(lines, head), fixed(x, b.form, 8, true)...)
	}
	end := fmt.Sprintf("/&  ----------  End of data for channel %2d  ----------", s.channel)
	if s.old {
		end = strings.ToUpper(end)
	}
	return append(lines, end)
}

// The invented channels that the fixtures hold.
var (
	v2Old = v2Sample{n: 173, channel: 4, station: 99321, direction: 270, stationChannel: 12, location: "Free Field",
		step: 0.02, stepText: ".020", x: ring(173, 160, 1.6, 0.97), form: "%10.3f", old: true, low: 0.4, high: 23, named: true}
	v2Three = []v2Sample{
		{n: 200, channel: 1, station: 99321, direction: 20, location: "Freefield", step: 0.005, stepText: ".005",
			x: ring(200, 90, 1.8, 0.98), form: "%10.5f", low: 0.3, high: 40},
		{n: 200, channel: 2, station: 99321, direction: 500, label: " Up", location: "Freefield", step: 0.005, stepText: ".005",
			x: ring(200, 41, 1.7, 0.96), form: "%10.6f", low: 0.3, high: 40},
		// Negative values of three digits before the point fill their fields.
		{n: 200, channel: 3, station: 99321, direction: 360, location: "Freefield", step: 0.005, stepText: ".005",
			x: ring(200, -420, 1.85, 0.985), form: "%10.5f", low: 0.3, high: 40},
	}
	v2Bridge = v2Sample{n: 96, channel: 7, station: 99322, direction: 800, label: " Long", stationChannel: 9,
		location: "Bent 2: North Column, Grnd Level", step: 0.01, stepText: ".010", x: ring(96, 25, 1.75, 0.97), form: "%10.6f",
		low: 0.1, high: 50}
)

// v2Fixtures are the files under testdata/records/californiav2.
func v2Fixtures(t testing.TB) []ringFixture {
	const format = "californiav2"
	var three []string
	for _, s := range v2Three {
		three = append(three, s.lines()...)
	}
	bridge := v2Bridge.lines()
	spectra := append([]string{"Response and Fourier amplitude spectra (91 periods,  .04 - 15.0 sec)   for"}, v2Bridge.text()...)
	spectra = append(spectra, "", "Units for spectra are inches and sec, except Sa is in fraction of g.")
	return []ringFixture{
		{format, "old-uppercase.v2", v2Old.lines(), "\r\n"},
		{format, "three-channels.v2", three, "\r\n"},
		{format, "bridge-column.v2", bridge, "\n"},
		{format, "spectra.v3", spectra, "\r\n"},
		{format, "damaged-truncated.v2", bridge[:52], "\n"},
		{format, "damaged-overflow.v2", edit(t, bridge, 50, bridge[49][10:20], "**********"), "\n"},
		{format, "damaged-step.v2", edit(t, bridge, 46, ".010 sec", ".020 sec"), "\n"},
	}
}
