package ingest

import (
	"errors"
	"testing"
)

func TestParseUnit(t *testing.T) {
	groups := map[Unit][]string{
		{"g", 9.80665}:     {"g", "G", " g ", "G's", "g.", "gn", "gs"},
		{"mg", 0.00980665}: {"mg", "MG", "milli-g"},
		{"m/s2", 1}:        {"m/s2", "m/s^2", "m/s/s", "m/s**2", "m s-2", "m s^-2", "M/SEC/SEC", "m/sec2", "m/s²", "m·s⁻²", "mps2", "m/(s*s)", "meters/second^2"},
		{"cm/s2", 0.01}:    {"cm/s2", "CM/S/S", "cm/sec/sec", "CM/SEC**2", "cm/sec2", "cm/s^2", "cm s-2"},
		{"gal", 0.01}:      {"gal", "Gal", "GAL", "gals"},
		{"mm/s2", 0.001}:   {"mm/s2", "mm/s/s"},
		{"in/s2", 0.0254}:  {"in/s2", "in/sec/sec", "in/sec^2", "inch/s2", "inches/second/second"},
		{"ft/s2", 0.3048}:  {"ft/s2", "ft/s/s", "feet/sec^2", "FT/SEC2"},
	}
	for want, spellings := range groups {
		for _, s := range spellings {
			if got, err := ParseUnit(s); got != want || err != nil {
				t.Errorf("ParseUnit(%q) = %v, %v, want %v", s, got, err, want)
			}
		}
	}
	bad := map[string]string{
		"":        "unit is empty",
		"counts":  "raw counts need a scale; convert them to a unit of acceleration first",
		"Counts.": "raw counts need a scale; convert them to a unit of acceleration first",
		"cm/s":    `"cm/s" is a unit of velocity, not of acceleration`,
		"m s-1":   `"m s-1" is a unit of velocity, not of acceleration`,
		"cm":      `"cm" is a unit of length, not of acceleration`,
		"ga":      `unknown unit "ga"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		"g/s2":    `unknown unit "g/s2"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		"mgal":    `unknown unit "mgal"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		"/s2":     `unknown unit "/s2"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
		"m/s3":    `unknown unit "m/s3"; known are g, mg, m/s2, cm/s2, gal, mm/s2, in/s2, ft/s2`,
	}
	for s, want := range bad {
		if got, err := ParseUnit(s); err == nil || err.Error() != want {
			t.Errorf("ParseUnit(%q) = %v, error %v, want %q", s, got, err, want)
		}
	}
}

// TestChooseUnit covers who may state a unit and what comes of it.
func TestChooseUnit(t *testing.T) {
	stated := func(s string) statement { return statement{s, 3} }
	cases := []struct {
		stated statement
		hints  Hints
		unit   string
		warned bool
	}{
		{stated("g"), Hints{}, "g", false},
		{stated("cm/s2"), Hints{Unit: "gal"}, "cm/s2", false},
		{statement{}, Hints{Unit: "gal"}, "gal", false},
		{stated("furlong"), Hints{Unit: "gal"}, "gal", true},
		{stated("furlong"), Hints{}, "", false},
		{stated("g"), Hints{Unit: "gal"}, "", false},
		{stated("g"), Hints{Unit: "counts"}, "", false},
		{stated("counts"), Hints{Unit: "g"}, "", false},
		{stated("g"), Hints{Unit: "gal", UnitForAll: true}, "g", false},
		{stated("gal"), Hints{Unit: "cm/s2", UnitForAll: true}, "gal", false},
		{stated("furlong"), Hints{Unit: "gal", UnitForAll: true}, "", false},
		{statement{}, Hints{Unit: "gal", UnitForAll: true}, "gal", false},
		{statement{}, Hints{}, "", false},
	}
	for _, k := range cases {
		unit, warning, err := chooseUnit(k.stated, k.hints)
		if unit.Name != k.unit || (warning != "") != k.warned || (err == nil) != (k.unit != "") {
			t.Errorf("chooseUnit(%q, %q) = %q, %q, %v", k.stated.text, k.hints.Unit, unit.Name, warning, err)
		}
		if _, ok := errors.AsType[*ParseError](err); err != nil && !ok {
			t.Errorf("chooseUnit(%q, %q): error of type %T", k.stated.text, k.hints.Unit, err)
		}
	}
}

// Counts for all files serve miniSEED: files that state a unit keep it, silent ones
// of other formats are refused.
func TestCountsForAll(t *testing.T) {
	hints := Hints{Unit: "counts", UnitFrom: "--unit", UnitForAll: true}
	if unit, _, err := chooseUnit(statement{"gal", 7}, hints); err != nil || unit.Name != "gal" {
		t.Errorf("beside a stated unit: %q, %v", unit.Name, err)
	}
	const want = ": unit: from --unit: raw counts need a scale; convert them to a unit of acceleration first"
	if _, _, err := chooseUnit(statement{}, hints); err == nil || err.Error() != want {
		t.Errorf("of a silent file: %v, want %q", err, want)
	}
	for text, want := range map[string]bool{"counts": true, " Count": true, "cts": true, "": false, "g": false, "countess": false} {
		if got := IsCounts(text); got != want {
			t.Errorf("IsCounts(%q) = %v", text, got)
		}
	}
}
