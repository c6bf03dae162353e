package query

import (
	"slices"
	"strings"
	"testing"
)

// A point a record, whatever its components; what lacks a number is counted.
func TestRecordsChart(t *testing.T) {
	unplaced, near, alone := handRecords()[0], handRecords()[0], handRecords()[5]
	unplaced.code, unplaced.distanceKM = "R7", nil
	near.code, near.distanceKM = "R8", ptr(0.0)
	alone.code, alone.event = "R9", nil
	a, err := RecordsQuestion{}.Ask(t.Context(), newStore(t, handGrid, append(handRecords(), unplaced, near, alone)))
	if err != nil {
		t.Fatal(err)
	}
	// R1 of 6.5 at 12.5 km, R2 of 6.5 at 40 km and R8 at 0 are drawn; R3 has neither a
	// magnitude nor a distance, nor has R9; R4 to R7 have no distance.
	c := a.Chart()
	if c.Title != "Magnitude and distance of 3 records" || c.X != "distance as stated (km)" || c.Y != "magnitude Mw" {
		t.Errorf("%q, %q, %q", c.Title, c.X, c.Y)
	}
	for _, want := range []string{"not drawn: 6 records (4 lack distance, 2 lack both)", "1 record nearer than 0.1 km, drawn there"} {
		if !slices.Contains(c.Notes, want) {
			t.Errorf("%q is not among %q", want, c.Notes)
		}
	}
	for _, g := range c.Groups {
		want := map[string][]float64{"ground C": {12.5, 0.1}, "unknown": {40}}[g.Name]
		if !slices.Equal(g.X, want) || slices.ContainsFunc(g.Y, func(m float64) bool { return m != 6.5 }) {
			t.Errorf("%s: %v at %v", g.Name, g.Y, g.X)
		}
	}
}

// The kinds of distances are told, of several with how many there are.
func TestKindsOfDistances(t *testing.T) {
	row := func(record string, rupture, best float64) RecordRow {
		return RecordRow{Record: record, Magnitude: ptr(6.0), MagnitudeType: ptr("Mw"), DistanceKM: &best, RuptureKM: &rupture}
	}
	a := &RecordsAnswer{Rows: []RecordRow{row("A", 3, 3), row("A", 3, 3), row("B", 4, 4)}}
	if c := a.Chart(); c.X != "rupture distance (km)" {
		t.Errorf("%q", c.X)
	}
	other := row("C", 5, 6)
	other.MagnitudeType = nil
	a.Rows = append(a.Rows, other)
	if c := a.Chart(); c.X != "distance (km): rupture 2, as stated 1" || c.Y != "magnitude Mw, of unknown type" {
		t.Errorf("%q, %q", c.X, c.Y)
	}
	if c := (&RecordsAnswer{}).Chart(); len(c.Groups) != 0 || strings.Contains(c.Title, "1") {
		t.Errorf("%+v", c)
	}
}
