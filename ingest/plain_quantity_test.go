package ingest

import (
	"fmt"
	"testing"
)

// Sentences say that the numbers are no acceleration where nothing says that they are.
func TestPlainHeadsOfQuantities(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
	const velocity, displacement = "skip: velocity series, not acceleration", "skip: displacement series, not acceleration"
	cases := []headCase{
		{"# Corrected velocity, station ABC", velocity}, {"# VEL ABC NS", velocity}, {"# Ground velocity, units: cm/s", velocity}, {"Ground velocity, units: cm/s", velocity}, {"# 1500 velocity points", velocity},
		{"# velocity time history", velocity}, {"# displacement of station ABC", displacement}, {"# DISP. ABC", displacement}, {"# Displacement (cm), station ABC", displacement}, {"# displacement in cm", displacement},
		{"# ABC NS velocity", velocity}, {"# station ABC, velocity [cm/s]", velocity}, {"ABC NS VEL CM/SEC", velocity}, {"# Integrated to velocity", velocity}, {"# NS, displacement (cm)", displacement},
		{"# SA 5% damping", "skip: " + spectraReason}, {"# PSA (g), 5%", "skip: " + spectraReason},
		{"# Response spectrum 5% damping", "skip: " + spectraReason}, {"# Fourier amplitude spectrum of ABC", "skip: " + spectraReason}, {"# Acceleration response spectrum", "skip: " + spectraReason},
		{"# Corrected velocity, station ABC\n# unit: g", "g 0.02;the file says g: gal from --unit not used"}, {"# VEL ABC NS\nAcc", "gal 0.02;"},
	}
	for _, line := range []string{
		"Response spectrum matched to site class B", "Response spectra are available separately", "Velocity model: local", "Velocity, Vs30 = 300 m/s", "Shear-wave velocity", "Velocity data not available", "Corrected acceleration, velocity and displacement",
		"Displacement of 3 cm at end", "Displacement sensor: none", "Velocity (cm/s): 3.2", "Final displacement, cm", "corrected for zero velocity", "baseline corrected in velocity", "no velocity", "Acceleration and velocity", "Station SA 12, 5 km", "DISP 3.1 CM", "VELOCITY 12 CM/S AT 4 S",
	} {
		cases = append(cases, headCase{"# " + line, "gal 0.02;"})
	}
	checkHeads(t, cases, column(20, "%.4f"), forAll)
	checkHeads(t, []headCase{{"# Corrected velocity, station ABC", `gal 0.02;line 1: "Corrected velocity, station ABC" speaks of another quantity: gal from catalogue line 2 taken`}},
		column(20, "%.4f"), Hints{Unit: "gal", UnitFrom: "catalogue line 2", StepS: 0.02})
}

// Lines that only mention another quantity do not make a file skipped in silence: it is
// read where they plainly speak of something else, and refused where that is open.
func TestPlainHeadsOfMentions(t *testing.T) {
	forAll := Hints{Unit: "gal", UnitFrom: "--unit", UnitForAll: true, StepS: 0.02}
	refused := func(at int, line, reason string) string {
		return fmt.Sprintf("case:%d: quantity: %s may say %s: if the numbers are accelerations, state their unit as # unit: …, else leave the file out", at, found(line), reason)
	}
	const velocity, displacement = "velocity series, not acceleration", "displacement series, not acceleration"
	var cases []headCase
	for _, line := range []string{
		"SA(1 s, 5% damping) = 0.03 g", "PSA at 1 s: 0.3 g, 5% damping", "PSV 5% = 20 cm/s", "Fourier spectrum peak at 2 Hz", "Correction: parabola fitted to velocity", "Processed by polynomial fit to velocity",
		"Corrected to minimise displacement", "Minimized final misfit in velocity", "Error of misfit in velocity",
	} {
		for _, title := range []string{"", "# Accelerogram, station ABC\n", "# Acceleration time history\n"} {
			cases = append(cases, headCase{title + "# " + line, "gal 0.02;"})
		}
	}
	for line, reason := range map[string]string{
		"PSA, damping = 0.05": spectraReason, "SA 5%, T = 0.01 to 10 s": spectraReason, "Response spectrum at 1 s: 0.3 g": spectraReason,
		"Response spectrum computed with 5% damping": spectraReason, "Elastic response spectra in Appendix": spectraReason, "Velocity, displacement: zero initial conditions": velocity, "VEL. TYPE SEISMOGRAPH": velocity,
		"Noise level raised by integration to velocity": "", "Trend removed after integration to displacement": displacement,
	} {
		want := "gal 0.02;"
		if reason != "" {
			want = refused(1, line, reason)
		}
		cases = append(cases, headCase{"# " + line, want}, headCase{"# " + line + "\n# unit: gal", "gal 0.02;"})
	}
	checkHeads(t, append(cases,
		headCase{"# Accelerogram, station ABC\n# Corrected velocity, station ABC", refused(2, "Corrected velocity, station ABC", velocity)},
		headCase{"# quantity: velocity\n# Acceleration time history", `case:1: quantity: "quantity: velocity" may say velocity series, not acceleration: if the numbers are accelerations, correct the line, else leave the file out`}, headCase{"# quantity: velocity\n# unit: gal", `case:1: quantity: "quantity: velocity" may say velocity series, not acceleration: if the numbers are accelerations, correct the line, else leave the file out`},
		headCase{"# quantity: spectral acceleration", "skip: " + spectraReason}, headCase{"# quantity: velocity", "skip: " + velocity},
		headCase{"# recorded velocity", "skip: " + velocity}, headCase{"# Response spectrum, damping: 5%", "skip: " + spectraReason},
	), column(20, "%.4f"), forAll)
}

// What is wrong with the columns is said before what a line may mean.
func TestPlainColumnsBeforeWords(t *testing.T) {
	var values []string
	for i := range 20 {
		values = append(values, fmt.Sprintf("%.2f,%d,%d,%d,%d,%d", float64(i)*0.01, i%7-3, i%5-2, i%3-1, i%4-1, i%2))
	}
	const names = "Time (s),NS (gal),EW (gal),UD (gal),NS vel (cm/s),EW vel (cm/s)"
	checkHeads(t, []headCase{{names, `case:1: columns: column 5 is "NS vel (cm/s)"; known are time, acc, velocity, displacement and directions (NS EW UD, N E Z, H1 H2 V, azimuths)`}}, values, Hints{})
}
