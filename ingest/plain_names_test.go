package ingest

import (
	"errors"
	"fmt"
	"strings"
	"testing"
)

// No table of anything else becomes an acceleration because its columns are even.
func TestPlainNamesOfOtherThings(t *testing.T) {
	hints := Hints{Unit: "g", UnitForAll: true, StepS: 0.02, StepForAll: true}
	const spectra, known = "spectra, not a time series", "; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths); a title or comment begins with #"
	for _, c := range []struct{ names, skip, refusal string }{
		{"Period (s),Sa (g)", spectra, ""}, {"T,Sa", spectra, ""}, {"Period,PSA", spectra, ""}, {"period_s,psa_g", spectra, ""},
		{"Freq (Hz),FAS (g s)", spectra, ""}, {"Time (s),Sa (g)", spectra, ""}, {"Time (s),PSA (g)", spectra, ""}, {"Period (s),Acceleration (g)", spectra, ""},
		{"T (s),SD (cm)", spectra, ""}, {"# Period (s),Sa (g)", spectra, ""}, {`"Period (s)","Sa (g)"`, spectra, ""}, {"Frequency,amplitude", spectra, ""},
		{"T,Spectral acceleration (g)", spectra, ""}, {"Time,SV", spectra, ""}, {"Period,Sa\ns,g", spectra, ""},
		{"Period,Sa\n# computed with 5 %", spectra, ""}, {"Period,Sa\n# 5 %, invented\n#", spectra, ""},
		{"Time,Velocity\ns,cm/s", "velocity series, not acceleration", ""},
		{"t,disp_cm", "displacement series, not acceleration", ""},
		{"time,intensity", "", `case:1: columns: column 2 is "intensity"` + known},
		{"# time,intensity", "", `case:1: columns: column 2 is "intensity"` + known},
		{"Temps (s),Vitesse", "", `case:1: columns: column 1 is "Temps (s)"` + known},
		{"# Temps (s),Vitesse", "", `case:1: columns: column 1 is "Temps (s)"` + known},
		{"# Period (s),amplitude", "", `case:1: columns: column 2 is "amplitude"` + known}, {"time,data", "", `case:1: columns: column 2 is "data"` + known},
		{"t,d", "", `case:1: columns: column 2 is "d"` + known},
		{"t,v", "", `case:1: columns: column "v": vertical or velocity? write UD, or velocity`},
		{"time (s),U", "", `case:1: columns: column "U": vertical or displacement? write UD, or displacement`},
		{"Time,Acc\ns,cm/s", "", `case:2: unit: "cm/s" is a unit of velocity, not of acceleration`},
	} {
		lines := head(strings.Split(c.names, "\n"), timed(even(20, 0.02), "%.2f", ","))
		_, channels, err := parseLines(lines, hints)
		skip, isSkip := errors.AsType[*NotMotionError](err)
		switch {
		case err == nil:
			t.Errorf("%q: read %d channels", c.names, len(channels))
		case isSkip != (c.skip != "") || isSkip && skip.Reason != c.skip, !isSkip && err.Error() != c.refusal:
			t.Errorf("%q: %v", c.names, err)
		}
	}
	for _, name := range []string{"Sa (g)", "PSA", "Spectral acceleration"} {
		_, _, err := parseLines(head([]string{name}, column(20, "%.4f")), hints)
		if _, ok := errors.AsType[*NotMotionError](err); !ok {
			t.Errorf("%s over one column: %v", name, err)
		}
	}
	for name, lines := range map[string][]string{
		"blanks": head([]string{"Temps Vitesse"}, timed(even(20, 0.02), "%.2f", " ")), "one column": head([]string{"intensity"}, column(20, "%.4f")),
	} {
		if _, _, err := parseLines(lines, hints); err == nil || !strings.Contains(err.Error(), "case:1: columns: column 1 is ") {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// fourColumns are rows of a number that rises by step and of three that ring.
func fourColumns(step float64) []string {
	rows := timed(even(20, step), "%.2f", ",")
	for i, v := range column(20, "%.3f") {
		rows[i] += fmt.Sprintf(",%s,%d", v, i%7-3)
	}
	return rows
}

// The names by which columns are commonly called.
func TestPlainNamesOfDirections(t *testing.T) {
	for _, c := range []struct {
		names string
		step  float64 // of the first column
		want  string
		units string
	}{
		{"Time (s),N-S (g),E-W (g),U-D (g)", 0.02, "h 0, h 90, v", "g"},
		{"Time (s),N00E (g),N90E (g),UP (g)", 0.02, "h 0, h 90, v", "g"},
		{"t,N35E,S55E,Z", 0.02, "h 35, h 125, v", "gal"},
		{"t,S90W,N00E,V", 0.02, "h 270, h 0, v", "gal"},
		{"No.,NS,EW,UD", 1, "h 0, h 90, v", "gal"},
		{"Time (s),L (g),T (g),V (g)", 0.02, "h #1, h #2, v", "g"},
		{"t,L,T,V", 0.02, "h #1, h #2, v", "gal"},
		{"Time,Acc N-S,Acc_E-W,Acc UD", 0.02, "h 0, h 90, v", "gal"},
	} {
		lines := head([]string{c.names}, fourColumns(c.step))
		_, channels, err := parseLines(lines, Hints{Unit: "gal", UnitForAll: true, StepS: 0.02})
		var got []string
		for _, ch := range channels {
			got = append(got, short(ch.Orientation))
			if ch.Unit != c.units || ch.StepS != 0.02 {
				t.Errorf("%s: unit %s, step %g s", c.names, ch.Unit, ch.StepS)
			}
		}
		if joined := strings.Join(got, ", "); err != nil || joined != c.want {
			t.Errorf("%s: %s, want %s; %v", c.names, joined, c.want, err)
		}
	}
	three := timed(even(20, 0.02), "%.2f", ",0.5,")
	checkRefusals(t, []refusal{
		{"T that is a time", head([]string{"T,L,V"}, three), Hints{Unit: "gal"}, `case:1: columns: column T rises like a time: write time or transverse`},
		{"T alone with a unit", head([]string{"T (g),NS,UD"}, three), Hints{Unit: "gal"}, `case:1: time: unknown unit "g" of time; known are s and ms`},
	})
}

// U, V and W are axes of any direction where nothing beside them makes W west, and no two
// columns are of one direction.
func TestPlainNamesOfAxes(t *testing.T) {
	const axes = ": name the directions (NS EW UD, or azimuths)"
	one := func(a, b string) string {
		return `case:1: columns: columns "` + a + `" and "` + b + `" are of one direction, or U, V, W of any` + axes
	}
	hints := Hints{Unit: "gal", UnitForAll: true, StepS: 0.02}
	checkHeads(t, []headCase{
		{"Time (s),U (gal),V (gal),W (gal)", one("U (gal)", "V (gal)")}, {"Time (s),u,v,w", one("u", "v")}, {"t,W,V,U", one("V", "U")},
		{"t,NS,N,UD", one("NS", "N")}, {"t,N,S,UD", one("N", "S")}, {"t,000,180,V", one("000", "180")}, {"t,N,E,EW", one("E", "EW")}, {"t,N45E,45,Z", one("N45E", "45")},
		{"Time,L,H1,V", one("L", "H1")}, {"t,UD,E,Z", one("UD", "Z")},
		{"t,H1,W,V", `case:1: columns: column "W" beside U or V may be of any direction` + axes},
		{"t,N,W,U", "gal 0.02 h 0;gal 0.02 h 270;gal 0.02 v;"}, {"t,N,E,V", "gal 0.02 h 0;gal 0.02 h 90;gal 0.02 v;"}, {"t,L,T,V", "gal 0.02 h #1;gal 0.02 h #2;gal 0.02 v;"},
	}, fourColumns(0.02), hints)
	three := timed(even(20, 0.02), "%.2f", ",0.5,")
	checkHeads(t, []headCase{
		{"t,U,V", one("U", "V")}, {"t,W,U", `case:1: columns: column "W" beside U or V may be of any direction` + axes}, {"t,Acc V,Acc W", `case:1: columns: column "Acc W" beside U or V may be of any direction` + axes},
	}, three, hints)
}

// Channel codes give the directions E, N and Z, and say what the sensor measures.
func TestPlainNamesByCode(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
	const three, dirs = "gal 0.02 h 90;gal 0.02 h 0;gal 0.02 v;", ": name the directions (NS EW UD, or azimuths)"
	velocity := func(line int, code string) string {
		return fmt.Sprintf("case:%d: unit: %s is the channel of a velocity sensor: if the numbers are accelerations, state their unit as # unit: …", line, code)
	}
	checkHeads(t, []headCase{
		{"Time (s),HNE (gal),HNN (gal),HNZ (gal)", three}, {"t,ABC.HNE,ABC.HNN,ABC.HNZ", three}, {"t,XX.ABC.00.BNE,XX.ABC.00.BNN,XX.ABC.00.BNZ", three}, {"t,HGE_gal,HGN_gal,HGZ_gal", three},
		{"t,Acc HNE,Acc HNN,Acc HNZ", three}, {"t,LNE,LNN,HGZ\ns,gal,gal,gal", three},
		{"t,HN1,HN2,HNZ", `case:1: columns: column "HN1": orientation code 1 may be of any direction` + dirs}, {"t,HNU,HNV,HNW", `case:1: columns: column "HNU": orientation code U may be of any direction` + dirs},
		{"t,ABC.HNE,DEF.HNE,Z", `case:2: columns: column "DEF.HNE": several columns of accelerations need different directions as names`},
		{"t,HHE,HHN,HHZ", velocity(1, "HHE")}, {"# unit: gal\nt,HHE,HHN,HHZ", three}, {"t,HHE (gal),HHN (gal),HHZ (gal)", three}, {"t,HHE,HHN,HHZ\ns,gal,gal,gal", three},
		{"t,HHE (m/s),HHN (m/s),HHZ (m/s)", `case:1: unit: "m/s" is a unit of velocity, not of acceleration`},
	}, fourColumns(0.02), forAll)
	checkHeads(t, []headCase{
		{"# channel: HNE", "gal 0.02 h 90;"}, {"# component: XX.ABC.00.HNE", "gal 0.02 h 90;"}, {"HNZ", "gal 0.02 v;"}, {"# HNE", "gal 0.02;"}, {"# HNE (gal)", "gal 0.02 h 90;"},
		{"# component: HN2", `case:1: component: unknown direction "HN2": orientation code 2 may be of any direction`},
		{"# channel: BHZ", velocity(1, "BHZ")}, {"# station: ABC\n# component: EHN", velocity(2, "EHN")}, {"# component: EHN\n# unit: gal", "gal 0.02 h 0;"},
	}, column(20, "%.4f"), forAll)
	checkHeads(t, []headCase{{"Time (s),CH1 (gal)", "gal 0.02;"}, {"Time (s),HN1 (gal)", `gal 0.02;column "HN1 (gal)": orientation code 1 may be of any direction`}},
		timed(even(20, 0.02), "%.2f", ","), forAll)
	checkHeads(t, []headCase{{"# component: EHN", "gal 0.02 h 0;"}}, column(20, "%.4f"), Hints{Unit: "gal", UnitFrom: "catalogue line 2", StepS: 0.02})
}
