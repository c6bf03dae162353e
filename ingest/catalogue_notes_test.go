package ingest

import (
	"slices"
	"testing"
)

// A position of 0, 0 is how tables leave one out.
func TestCatalogueNowhere(t *testing.T) {
	c := catalogueOf(t, "file,event_latitude,event_longitude,station_latitude,station_longitude",
		"a.txt,0,0,30.5,150", "b.txt,30.5,0,0.0,0", "c.txt,0,150,30,0", "d.txt,,,,")
	for rel, want := range map[string][2]Number{
		"a.txt": {{}, Known(30.5)}, "b.txt": {Known(30.5), {}}, "c.txt": {Known(0), Known(30)}, "d.txt": {},
	} {
		ch := Channel{}
		c.Apply(rel, &ch)
		if got := [2]Number{ch.Event.Latitude, ch.Station.Latitude}; got != want {
			t.Errorf("%s: latitudes %v, want %v", rel, got, want)
		}
	}
	want := []string{"line 2: a position of 0, 0 is taken as unknown", "line 3: a position of 0, 0 is taken as unknown"}
	if got := c.Notes(); !slices.Equal(got, want) {
		t.Errorf("notes %q", got)
	}
}

// Rows that give a file without direction two of them are named, and no longer said
// to match nothing.
func TestCatalogueTornDirections(t *testing.T) {
	rows := []string{"file,component,unit", "a.txt,NS,g", "a.txt,EW,g", "b.txt,N,", "b*.txt,NS,", "c.txt,NS,", "c.txt,UD,", "[yz].txt,E,", "[yz].txt,N,"}
	c := catalogueOf(t, rows...)
	want := map[string]string{"a.txt": "", "b.txt": "h 0", "c.txt": "v", "z.txt": "", "y.txt": ""}
	for rel, direction := range want {
		ch := Channel{}
		if rel == "c.txt" {
			ch.Orientation = vertical // stated by the file or its name
		}
		c.Hints(rel, Hints{})
		c.Apply(rel, &ch)
		if got := short(ch.Orientation); got != direction {
			t.Errorf("%s: orientation %q, want %q", rel, got, direction)
		}
	}
	notes := []string{
		"lines 2 and 3 give a.txt different directions, and it states none: of them only unit and dt_s are taken",
		"lines 8 and 9 give y.txt different directions, and it states none: of them only unit and dt_s are taken",
	}
	if got := c.Notes(); !slices.Equal(got, notes) {
		t.Errorf("notes %q", got)
	}
	if got := c.Unmatched(); !slices.Equal(got, []int{6}) {
		t.Errorf("unmatched %v, want the north of the vertical", got)
	}
}
