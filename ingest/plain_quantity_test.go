package ingest

import "testing"

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
