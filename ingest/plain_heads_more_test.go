package ingest

import (
	"fmt"
	"strings"
	"testing"
)

// Units and steps of other things than the numbers contradict no flag; a line that
// speaks of the numbers does, and a row of a catalogue for the file overrides it.
func TestPlainHeadsOfOtherUnits(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true}
	var cases []headCase
	for _, line := range []string{
		"Sensor: ACME 3C, sensitivity 2.5 V/g", "Full scale: 2 g", "Instrument: 24 bit, +/-2 g, SN 123", "Trigger level: 0.005 g", "Threshold 5 mg, pre-event 10 s",
		"Peak ground acceleration: 0.1238 g", "Max acceleration 0.1238 g at 4.9 s", "Station G, g = 9.81", "g = 980.665 cm/s2", "1 g = 9.80665 m/s2",
		"Original sampling rate 200 Hz, decimated to 100 Hz", "Pre-event interval: 0.05 min", "Taper interval 0.05 s", "Step 0.02: baseline correction",
	} {
		cases = append(cases, headCase{line, "gal 0.01;"})
	}
	cases = append(cases, []headCase{
		{"Amplitude unit: m/s2", `case:1: unit: "Amplitude unit: m/s2" speaks of m/s2, --unit says gal: state the unit as # unit: …`},
		{"Einheit: m/s²", `case:1: unit: "Einheit: m/s²" speaks of m/s2, --unit says gal: state the unit as # unit: …`},
		{"Units of 0.001 g", `case:1: unit: "Units of 0.001 g" speaks of g, --unit says gal: state the unit as # unit: …`},
		{"# g", `case:1: unit: "g" speaks of g, --unit says gal: state the unit as # unit: …`},
	}...)
	checkHeads(t, cases, column(20, "%.4f"), forAll)
	checkHeads(t, []headCase{{"SPS 200", `gal 0.01;line 1: "SPS 200" speaks of 200 samples a second, catalogue line 2 says a step of 0.01 s: state it as # rate = …`}},
		column(20, "%.4f"), Hints{Unit: "gal", StepS: 0.01, StepFrom: "catalogue line 2"})
	checkHeads(t, []headCase{{"DATA IN UNITS OF G", "gal 0.01;line 1 speaks of g: gal from catalogue line 2 taken"}},
		column(20, "%.4f"), Hints{Unit: "gal", UnitFrom: "catalogue line 2", StepS: 0.01})
}

// Rows of units in brackets or quotes, and rules under names, are what they look like.
func TestPlainHeadsOfUnitRows(t *testing.T) {
	const three = "gal 0.02 h 0;gal 0.02 h 90;gal 0.02 v;"
	checkHeads(t, []headCase{
		{"\"Time\",\"NS\",\"EW\",\"UD\"\n\"s\",\"gal\",\"gal\",\"gal\"", three},
		{"Time,NS,EW,UD\n----,--,--,--\ns,gal,gal,gal", three},
	}, fourColumns(0.02), Hints{})
	blanks := strings.Split(strings.ReplaceAll(strings.Join(fourColumns(0.02), "\n"), ",", " "), "\n")
	checkHeads(t, []headCase{{"Time NS EW UD\n(s) (gal) (gal) (gal)", three}, {"Time NS EW UD\n[s] [gal] [gal] [gal]", three}}, blanks, Hints{})
}

// One unit of time and one of acceleration say what two columns are, and words that
// name no quantity are a title.
func TestPlainHeadsOfAnyWords(t *testing.T) {
	checkHeads(t, []headCase{
		{"Zeit [s],Beschleunigung [m/s²]", "m/s2 0.02;"}, {"時間(s),加速度(gal)", "gal 0.02;"}, {"Time/s,Acc/g", "g 0.02;"}, {"Time / s,a / (m/s^2)", "m/s2 0.02;"},
		{"elapsed time (s),acc (gal)", "gal 0.02;"}, {"Time (s),Acc (gal)\n--------,---------", "gal 0.02;"},
		{"Periodo (s),Aceleración (g)", `case:1: columns: column 1 is "Periodo (s)"; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths); a title or comment begins with #`},
		{"NRC,HNE\n# unit: gal", "gal 0.02;"}, {"El Centro, 1940\n# unit: gal", "gal 0.02;"},
		{"Temps,Vitesse", `case:1: columns: column 1 is "Temps"; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths); a title or comment begins with #`},
	}, timed(even(20, 0.02), "%.2f", ","), Hints{})
	checkHeads(t, []headCase{{"AMATRICE", "gal 0.01;"}, {"Record_17", "gal 0.01;"}, {"Accelerogram", "gal 0.01;"}}, column(20, "%.4f"), Hints{Unit: "gal", StepS: 0.01})
	checkHeads(t, []headCase{{"elapsed (ms),acc (gal)", "gal 0.02;"}}, timed(even(20, 20), "%.0f", ","), Hints{})
}

// Several statements on a line are told apart, and what is not understood gives way to
// a flag where it is no comment.
func TestPlainHeadsOfSeveralStatements(t *testing.T) {
	checkHeads(t, []headCase{
		{"NPTS=20 DT=0.01 SEC\nUnits: gal", "gal 0.01;"}, {"Units: gal, DT=0.01 s, NPTS=20", "gal 0.01;"}, {"DT=0.01, NPTS=20, Units: gal", "gal 0.01;"},
		{"Units: gal;;;\ndt = 0,01", "gal 0.01;"}, {"Units: gal\nSampling rate: 100 samples/sec", "gal 0.01;"}, {"Units: gal\ndt: 10 msec", "gal 0.01;"},
		{"Units: gal\ndt: 0.01\nSamples: 20 (0.2 s)", "gal 0.01;"}, {"Units: gal\nrate: 100 Hz (0.01 s)", "gal 0.01;"},
		{"ACCELERATION, G\ndt: 0.01", "g 0.01;"},
	}, column(20, "%.4f"), Hints{})
	checkHeads(t, []headCase{
		{"Unit: SMA-1 No 23", `gal 0.01;line 1: unit "SMA-1 No 23" not understood`}, {"dt: 1/100 s", "gal 0.01;line 1: time step or rate not understood"},
		{"Samples: many", `gal 0.01;line 1: count "many" not understood`},
		{"dt: 0.005\nrate: fast", `case:2: rate: expected a sampling rate over zero in Hz, found "fast"`}, {"dt: 0.005\nrate: 100 Hz", "case:2: rate: 100 Hz here, a time step of 0.005 s in line 1"},
		{"# unit: SMA-1", `case:1: unit: unknown unit "SMA-1"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`},
	}, column(20, "%.4f"), Hints{Unit: "gal", UnitForAll: true, StepS: 0.01, StepForAll: true})
}

// Lines that say of the numbers what no flag may override.
func TestPlainHeadsAgainstFlags(t *testing.T) {
	scale := func(line string) string {
		return `case:1: unit: "` + line + `" speaks of counts or a scale, --unit says gal: state the unit as # unit: …`
	}
	checkHeads(t, []headCase{
		{"# raw counts", scale("raw counts")}, {"1 count = 0.001 gal", scale("1 count = 0.001 gal")}, {"Scale Factor 3920(gal)/6182761", scale("Scale Factor 3920(gal)/6182761")},
		{"Data every 0.005 sec", `case:1: dt: "Data every 0.005 sec" speaks of a step of 0.005 s, --dt says 0.01 s: state it as # dt = …`},
		{"Frequency: 200 Hz", `case:1: dt: "Frequency: 200 Hz" speaks of 200 samples a second, --dt says a step of 0.01 s: state it as # rate = …`},
		{"SPS 200", `case:1: dt: "SPS 200" speaks of 200 samples a second, --dt says a step of 0.01 s: state it as # rate = …`},
		{"Frequency: 25 Hz", "gal 0.01;"}, {"ACCELERATION, GAL", "gal 0.01;"},
		{"Quantity: Velocity", "skip: velocity series, not acceleration"}, {"# Type: displacement", "skip: displacement series, not acceleration"}, {"# Type: broadband", "gal 0.01;"},
	}, column(20, "%.4f"), Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.01, StepFrom: "--dt", StepForAll: true})
}

// What speaks of another unit, scale or step in the words of common heads.
func TestPlainHeadsOfWords(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02, StepFrom: "--dt", StepForAll: true}
	values := column(20, "%.4f")
	var cases []headCase
	for _, line := range []string{
		"1500 points of accel data equally spaced at .010 sec. (cm/sec/sec)", "1500 points at equal spacing of .01 sec in gal", "DELTA = 0.01", "delta: 0.01 s", "DELTA 1e-2", "Delta_X\t0.01",
		"SAMPLE_INTERVAL_S 0.01", "time increment 0.01", "Data spacing 10 ms", "1500 0.01 NPTS DT", "1500, 0.0100, NPTS, DT",
	} {
		cases = append(cases, headCase{"# " + line, fmt.Sprintf(`case:1: dt: %s speaks of a step of 0.01 s, --dt says 0.02 s: state it as # dt = …`, found(line))})
	}
	cases = append(cases, headCase{"# sampling_frequency 100", `case:1: dt: "sampling_frequency 100" speaks of 100 samples a second, --dt says a step of 0.02 s: state it as # rate = …`},
		headCase{"# time increment (s): 0.01", "gal 0.01;the file says a step of 0.01 s: 0.02 s from --dt not used"},
		headCase{"# delta: 0.05 deg, station ABC", "gal 0.02;"})
	for line, unit := range map[string]string{
		"Y_Unit_Label\tm/s^2": "m/s2", "acc_unit g": "g", "acc_unit cm_s2": "", "1500 points at equal spacing in g": "g", "1500 points of accel data (m/sec/sec)": "m/s2",
		"values are meters per second squared": "m/s2", "Data given as m per sec per sec": "m/s2", "ACCELERATION DATA IN M/SEC**2": "m/s2",
	} {
		want := fmt.Sprintf(`case:1: unit: %q speaks of %s, --unit says gal: state the unit as # unit: …`, line, unit)
		if unit == "" {
			want = "gal 0.02;"
		}
		cases = append(cases, headCase{"# " + line, want})
	}
	for _, line := range []string{
		"Data in counts", "digital counts, uncorrected", "ADC counts 24 bit", "calibration: 1.02e-6 g/count", "24 bit counts", "counts", "980000 counts per g", "values [counts]", "in counts, not converted", "raw counts, to be converted to gal",
		"amplitude in 0.1 gal", "mGal", "Accelerations (in %g)", "values x 1000", "cm/s^2 * 10", "data in mV", "Volts", "raw data, digitizer units", "in 10^-3 g",
		"Multiply by 0.1", "Multiply all values with 9.81 to get gal", "scale: 0.001", "scale_factor = 0.5", "Conversion factor: 981", "Multiplier 0.1",
	} {
		cases = append(cases, headCase{"# " + line, fmt.Sprintf(`case:1: unit: %q speaks of counts or a scale, --unit says gal: state the unit as # unit: …`, line)})
	}
	for _, line := range []string{
		"converted from counts", "Raw counts were converted to gal", "recorded in counts, then converted", "Full scale 8388608 counts", "Sensitivity: 419430 counts/V", "Peak of 0.1 mGal", "grid of 10 x 10 km", "sensor x 10, 3 channels", "version 2", "recorded in V3 format", "in 2 g range", "scale: 1.0", "Map scale 1:25000", "calibration 2040", "values were multiplied by 981",
	} {
		cases = append(cases, headCase{"# " + line, "gal 0.02;"})
	}
	checkHeads(t, append(cases, headCase{"# acceleration, meters per second squared", "m/s2 0.02;the file says m/s2: gal from --unit not used"}), values, forAll)
}

// Units of velocity and displacement are no accelerations, and a scale beside a unit is
// doubtful.
func TestPlainHeadsOfOtherMotions(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
	values := column(20, "%.4f")
	var cases []headCase
	for line, unit := range map[string]string{
		"All values in cm/s": "cm/s", "cm/s": "cm/s", "(CM/SEC)": "CM/SEC", "1500 points (cm/sec)": "cm/sec", "Y_Unit_Label m/s": "m/s", "Values are in cm": "cm", "data in m per sec": "m per sec",
	} {
		cases = append(cases, headCase{"# " + line, fmt.Sprintf(`case:1: unit: %s speaks of %s, which is no acceleration, --unit says gal: state the unit as # unit: …`, found(line), unit)})
	}
	for _, line := range []string{
		"DATA IN CM/SEC /SEC", "values in cm/s/s", "Data from a velocity of 3 cm/s on", "PGV of the data 3 cm/s", "Vs30 data: 300 m/s", "Data: shear wave 300 m/s", "Station at 12 m depth", "values in cm/s2",
	} {
		cases = append(cases, headCase{"# " + line, "gal 0.02;"})
	}
	checkHeads(t, append(cases,
		headCase{"# Multiply by 0.1\n# unit: gal", `gal 0.02;line 1: "Multiply by 0.1" speaks of counts or a scale: the numbers taken as gal`},
		headCase{"# scale: 0.5\nAcc (g)", `g 0.02;line 1: "scale: 0.5" speaks of counts or a scale: the numbers taken as g;the file says g: gal from --unit not used`},
	), values, forAll)
}

// What a digitiser makes of volts says nothing of the numbers, unless the line says that
// they are counts.
func TestPlainHeadsOfDigitisers(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
	var cases []headCase
	for _, line := range []string{
		"Digitizer: 24 bit, 2.38 uV/count", "LSB: 0.6 uV/count", "LSB: 0.6 µV per count", "Recorder gain 419430 counts/V", "0.4 counts per uV", "1e6 counts per volt",
	} {
		cases = append(cases, headCase{line, "gal 0.02;"}, headCase{"# " + line, "gal 0.02;"})
	}
	for _, line := range []string{"Data in counts, 2.38 uV/count", "raw counts (0.4 counts per uV)", "1.02e-6 g/count, 2.38 uV/count", "counts/V, 980 counts per g"} {
		cases = append(cases, headCase{"# " + line, fmt.Sprintf("case:1: unit: %s speaks of counts or a scale, --unit says gal: state the unit as # unit: …", found(line))})
	}
	checkHeads(t, cases, column(20, "%.4f"), forAll)
}

// A sentence on the unit of the numbers is no name of their column: it agrees with a
// unit that is stated, or contradicts it.
func TestPlainHeadsOfTitlesWithUnits(t *testing.T) {
	values := column(20, "%.4f")
	for line, unit := range map[string]string{
		"Values in meters per second squared": "m/s2", "Data in meters per second per second": "m/s2", "Amplitude in cm/sec squared": "cm/s2", "Acceleration values in cm per second squared": "cm/s2",
		"Data in g": "g", "Accel data (mm/s2)": "mm/s2",
	} {
		forAll := Hints{Unit: unit, UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
		checkHeads(t, []headCase{{line, unit + " 0.02;"}, {"# " + line, unit + " 0.02;"}}, values, forAll)
		forAll.Unit = "ft/s2"
		checkHeads(t, []headCase{{line, fmt.Sprintf("case:1: unit: %s speaks of %s, --unit says ft/s2: state the unit as # unit: …", found(line), unit)}}, values, forAll)
	}
	checkHeads(t, []headCase{{"Data in cm/s", `case:1: unit: "Data in cm/s" speaks of cm/s, which is no acceleration, --unit says gal: state the unit as # unit: …`}},
		values, Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02})
}
