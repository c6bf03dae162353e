package query

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"swaybook/pipeline/spectrum"
)

// TestQuantities checks units against the exact factors of NIST SP 811 (2008),
// appendix B.8, cited from memory: 1 lbf/in = 1.751268E+02 N/m, 1 lbf/ft =
// 1.459390E+01 N/m, 1 kip = 4.448222E+03 N, 1 lb = 4.535924E-01 kg to the digits
// printed there. A product must come out as the double nearest to the exact
// one; the digits below are from exact fractions (fractions.Fraction of Python
// 3.11.2).
func TestQuantities(t *testing.T) {
	cases := []struct {
		parse func(string) (float64, error)
		text  string
		want  float64
	}{
		{ParsePeriod, "1.35s", 1.35},
		{ParsePeriod, " 800 ms ", 0.8},
		{ParsePeriod, "1e-1s", 0.1},
		{ParsePeriod, "700ms", 0.7},
		{ParseLength, "5.2m", 5.2},
		{ParseLength, "360 cm", 3.6},
		{ParseLength, "3600mm", 3.6},
		{ParseLength, "12ft", 3.6576},
		{ParseLength, "10 in", 0.254},
		{ParseMass, "4100kg", 4100},
		{ParseMass, "3.2t", 3200},
		{ParseMass, "3.2 Mg", 3200},
		{ParseMass, "250 lb", 113.3980925},
		{ParseMass, "250 lbm", 113.3980925},
		{ParseWeight, "260kN", 260000},
		{ParseWeight, "2 MN", 2e6},
		{ParseWeight, "5N", 5},
		{ParseWeight, "7 kip", 31137.5513068235},
		{ParseWeight, "7kips", 31137.5513068235},
		{ParseWeight, "250 lb", 1112.055403815125},
		{ParseWeight, "250 lbf", 1112.055403815125},
		{ParseWeight, "2 kgf", 19.6133},
		{ParseWeight, "2 tf", 19613.3},
		{ParseStiffness, "2.4 kN/mm", 2400000},
		{ParseStiffness, "0.9 kN / mm", 900000},
		{ParseStiffness, "3 N/m", 3},
		{ParseStiffness, "3 kN/m", 3000},
		{ParseStiffness, "3MN/m", 3e6},
		{ParseStiffness, "3 N/mm", 3000},
		{ParseStiffness, "3 N/cm", 300},
		{ParseStiffness, "3 kN/cm", 300000},
		{ParseStiffness, "1 lbf/in", 175.1268352464764},
		{ParseStiffness, "1 lb/in", 175.1268352464764},
		{ParseStiffness, "1 lbf/ft", 14.593902937206364},
		{ParseStiffness, "0.2 kip/in", 35025.36704929527},
		{ParseStiffness, "1 kip/ft", 14593.902937206365},
		{ParseDamping, "5%", 0.05},
		{ParseDamping, "2.5 %", 0.025},
		{ParseDamping, "0.7%", 0.007},
		{ParseDamping, "0.05", 0.05},
		{ParseDamping, "0", 0},
		{ParseBandWidth, "10%", 0.1},
		{ParseBandWidth, "0.25", 0.25},
		{ParseBandWidth, "", 0},
	}
	for _, c := range cases {
		if got, err := c.parse(c.text); err != nil || got != c.want {
			t.Errorf("parse %q = %v, %v, want %v", c.text, got, err, c.want)
		}
	}
}

func TestQuantityMistakes(t *testing.T) {
	cases := []struct {
		parse func(string) (float64, error)
		text  string
		want  string
	}{
		{ParsePeriod, "1.6", `period: "1.6" has no unit; write one of s, ms behind the number`},
		{ParsePeriod, "1.6 h", `period: unknown unit "h" in "1.6 h"; accepted: s, ms`},
		{ParsePeriod, "", `period: "" does not start with a number such as 1.35 (decimal point, no thousands separators)`},
		{ParsePeriod, "-1s", `period: "-1s" is not a positive number in range`},
		{ParsePeriod, "0s", `period: "0s" is not a positive number in range`},
		{ParsePeriod, "1e999999999s", `period: "1e999999999s" is out of range`},
		{ParsePeriod, "1e-999999999s", `period: "1e-999999999s" is not a positive number in range`},
		{ParsePeriod, "NaNs", `period: "NaNs" does not start with a number such as 1.35 (decimal point, no thousands separators)`},
		{ParsePeriod, "1,6s", `period: unknown unit ",6s" in "1,6s"; accepted: s, ms`},
		{ParseMass, "260kN", `mass: unknown unit "kN" in "260kN"; accepted: kg, t, Mg, lb, lbm`},
		{ParseWeight, "4100kg", `weight: unknown unit "kg" in "4100kg"; accepted: N, kN, MN, kgf, tf, lbf, lb, kip, kips`},
		{ParseWeight, "5 mN", `weight: unknown unit "mN" in "5 mN"; accepted: N, kN, MN, kgf, tf, lbf, lb, kip, kips`},
		{ParseStiffness, "0x1p3 N/m", `stiffness: unknown unit "x1p3N/m" in "0x1p3 N/m"; accepted: N/m, kN/m, MN/m, N/mm, kN/mm, N/cm, kN/cm, lbf/in, lb/in, lbf/ft, lb/ft, kip/in, kip/ft`},
		{ParseDamping, "5", `damping: 5 is 500% of critical; it must be at least 0 and less than 1, written 5% or 0.05`},
		{ParseDamping, "100%", `damping: 1 is 100% of critical; it must be at least 0 and less than 1, written 5% or 0.05`},
		{ParseDamping, "-1%", `damping: -0.01 is -1% of critical; it must be at least 0 and less than 1, written 5% or 0.05`},
		{ParseDamping, "5 percent", `damping: unknown unit "percent" in "5 percent"; write a percentage such as 5% or a ratio such as 0.05`},
		{ParseBandWidth, "100%", `band: 1 is out of range; the half-width is a ratio of the period below 1, written 10% or 0.1`},
		{ParseLength, strings.Repeat("9", 41) + "m", `height: "` + strings.Repeat("9", 41) + `m" does not start with a number such as 1.35 (decimal point, no thousands separators)`},
	}
	for _, c := range cases {
		_, err := c.parse(c.text)
		checkUsage(t, c.text, err, c.want)
	}
}

func checkUsage(t *testing.T, what string, err error, want string) {
	t.Helper()
	var mistake *UsageError
	if !errors.As(err, &mistake) {
		t.Errorf("%s: error %v is no UsageError", what, err)
		return
	}
	if err.Error() != want {
		t.Errorf("%s: error\n%s\nwant\n%s", what, err, want)
	}
}

func TestLists(t *testing.T) {
	periods, err := ParsePeriods("0.2, 0.5s,800ms")
	if want := []float64{0.2, 0.5, 0.8}; err != nil || !slices.Equal(periods, want) {
		t.Errorf("ParsePeriods = %v, %v, want %v", periods, err, want)
	}
	if periods, err := ParsePeriods(""); err != nil || periods != nil {
		t.Errorf("ParsePeriods of nothing = %v, %v, want nil", periods, err)
	}
	percents, err := ParsePercentiles("16.0, 97.5,16, 0")
	if want := []float64{16, 97.5, 0}; err != nil || !slices.Equal(percents, want) {
		t.Errorf("ParsePercentiles = %v, %v, want %v", percents, err, want)
	}
	if got := percentKey(percents[0]) + " " + percentKey(percents[1]); got != "16 97.5" {
		t.Errorf("keys %q, want 16 97.5", got)
	}
	dampings, err := ParseDampings("2%,0.05")
	if want := []float64{0.02, 0.05}; err != nil || !slices.Equal(dampings, want) {
		t.Errorf("ParseDampings = %v, %v, want %v", dampings, err, want)
	}
	_, err = ParsePercentiles("16,101")
	checkUsage(t, "percentile", err, "percentiles: 101 is outside 0 to 100")
	_, err = ParsePercentiles("p16")
	checkUsage(t, "percentile", err, `percentiles: "p16" does not start with a number such as 1.35 (decimal point, no thousands separators)`)
	_, err = ParsePeriods("0.2,,1")
	checkUsage(t, "period", err, `periods: "" does not start with a number such as 1.35 (decimal point, no thousands separators)`)
}

func TestBands(t *testing.T) {
	cases := []struct {
		text    string
		want    Band
		in, out float64
	}{
		{"0.1:2", Band{0.1, 2}, 0.1, 2.1},
		{"100ms:2s", Band{0.1, 2}, 2, 0.09},
		{":2", Band{0, 2}, 0.001, 3},
		{"0.1:", Band{0.1, 0}, 1000, 0.05},
		{"", Band{}, 5, math.NaN()},
	}
	for _, c := range cases {
		got, err := ParseBand(c.text)
		if err != nil || got != c.want || !got.Contains(c.in) || got.Contains(c.out) && !math.IsNaN(c.out) {
			t.Errorf("ParseBand(%q) = %v, %v, want %v", c.text, got, err, c.want)
		}
	}
	_, err := ParseBand("2:0.1")
	checkUsage(t, "band", err, "band: from 2 s to 0.1 s is not an ascending range of periods")
	_, err = ParseBand("2")
	checkUsage(t, "band", err, `band: "2" is not FROM:TO, for example 0.1:2`)
}

func TestWords(t *testing.T) {
	c, err := ParseComponent("")
	if err != nil || c != ComponentRotD50 {
		t.Errorf("ParseComponent of nothing = %v, %v", c, err)
	}
	_, err = ParseComponent("all")
	checkUsage(t, "component", err, `component: unknown component "all"; accepted here: rotd50, rotd100, geomean, larger, each, h1, h2, v`)
	_, err = ParseStoredComponent("geomean")
	checkUsage(t, "component", err, `component: unknown component "geomean"; accepted here: all, recorded, each, h1, h2, v, rotd50, rotd100`)
	if c, err := ParseStoredComponent(""); err != nil || c != "" {
		t.Errorf("ParseStoredComponent of nothing = %q, %v", c, err)
	}
	s, err := ParseSiting(" structure , borehole")
	if err != nil || s != "structure,borehole" {
		t.Errorf("ParseSiting = %q, %v", s, err)
	}
	_, err = ParseSiting("roof")
	checkUsage(t, "siting", err, `siting: unknown siting "roof"; accepted: ground, free-field, structure, borehole, unknown, all`)
	if s, err := ParseStoredSiting(""); err != nil || s != SitingAll {
		t.Errorf("ParseStoredSiting of nothing = %q, %v", s, err)
	}
	if m, err := ParseMeasure(""); err != nil || m != MeasurePSA {
		t.Errorf("ParseMeasure of nothing = %q, %v", m, err)
	}
	_, err = ParseMeasure("pga")
	checkUsage(t, "measure", err, `measure: unknown measure "pga"; accepted: sd, psv, psa, vh, eta`)
	_, err = ParseUnits("metric")
	checkUsage(t, "units", err, `units: unknown units "metric"; accepted: si, us`)
	_, err = ParseFormat("csv", FormatTable, FormatJSON)
	checkUsage(t, "format", err, `format: unknown format "csv"; accepted here: table, json`)
	for name, want := range map[string]Method{"": spectrum.NigamJennings, "newmark-average": spectrum.NewmarkAverage, "newmark-linear": spectrum.NewmarkLinear} {
		if m, err := ParseMethod(name); err != nil || m != want {
			t.Errorf("ParseMethod(%q) = %v, %v", name, m, err)
		}
	}
	var mistake *UsageError
	if _, err = ParseMethod("euler"); !errors.As(err, &mistake) {
		t.Errorf("ParseMethod(euler) error %v is no UsageError", err)
	}
}

// TestStructureByHand: 260 kN is 260000/9.80665 = 26512.62 kg; on 2400 kN/m that
// is T = 2π·√(26512.62/2400000) = 0.660390 s.
func TestStructureByHand(t *testing.T) {
	s, err := ParseStructure(StructureText{Stiffness: "2.4 kN/mm", Weight: "260 kN", Damping: "2%", Height: "14 ft"})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(*s.MassKG-26512.62) > 0.005 || math.Abs(s.PeriodS-0.660390) > 5e-7 || s.Damping != 0.02 || *s.HeightM != 4.2672 {
		t.Errorf("structure %v s, %v, %v kg, %v m", s.PeriodS, s.Damping, *s.MassKG, *s.HeightM)
	}
	s, err = ParseStructure(StructureText{Period: "1.35s", Damping: "5%"})
	if err != nil || s.PeriodS != 1.35 || s.MassKG != nil || s.HeightM != nil {
		t.Errorf("structure %+v, %v", s, err)
	}
}

func TestStructureMistakes(t *testing.T) {
	cases := []struct {
		text StructureText
		want string
	}{
		{StructureText{Damping: "5%"}, "period: neither a period nor a stiffness is given"},
		{StructureText{Period: "1s", Stiffness: "1 N/m", Damping: "5%"}, "period: a period and a stiffness are given; give one"},
		{StructureText{Stiffness: "1 N/m", Damping: "5%"}, "stiffness: the period follows from a stiffness only with a mass or a weight"},
		{StructureText{Period: "1s", Mass: "1kg", Weight: "1N", Damping: "5%"}, "weight: a mass and a weight are given; give one"},
		{StructureText{Period: "1s", Damping: "5%", Height: "3"}, `height: "3" has no unit; write one of m, cm, mm, ft, in behind the number`},
		{StructureText{Period: "1s", Damping: "5%", Mass: "1 N"}, `mass: unknown unit "N" in "1 N"; accepted: kg, t, Mg, lb, lbm`},
		{StructureText{Stiffness: "1 kg", Damping: "5%", Mass: "1 kg"}, `stiffness: unknown unit "kg" in "1 kg"; accepted: N/m, kN/m, MN/m, N/mm, kN/mm, N/cm, kN/cm, lbf/in, lb/in, lbf/ft, lb/ft, kip/in, kip/ft`},
	}
	for _, c := range cases {
		_, err := ParseStructure(c.text)
		checkUsage(t, c.want, err, c.want)
	}
}

// FuzzQuantity: no text makes a panic, a number that is not positive and
// finite, or an error of another type.
func FuzzQuantity(f *testing.F) {
	for _, seed := range []string{"1.35s", "260 kN", "0.7kip/in", "5%", "-1e400 m", "1e", ".", "+.5e+3 N/m", "٣ m", "0e99999999s"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		for _, parse := range []func(string) (float64, error){ParsePeriod, ParseLength, ParseMass, ParseWeight, ParseStiffness} {
			x, err := parse(text)
			var mistake *UsageError
			if err != nil && !errors.As(err, &mistake) {
				t.Errorf("%q: %v", text, err)
			}
			if err == nil && (!(x > 0) || math.IsInf(x, 0)) {
				t.Errorf("%q = %v", text, x)
			}
		}
		if z, err := ParseDamping(text); err == nil && !(z >= 0 && z < 1) {
			t.Errorf("damping %q = %v", text, z)
		}
	})
}
