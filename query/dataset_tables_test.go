package query

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"swaybook/db"
)

// TestDatasetTables: the other tables are the lists and exports of the same selection.
func TestDatasetTables(t *testing.T) {
	store := newStore(t, handGrid, append(handRecords(), hostileRecords()...))
	selection := Selection{Where: `record != "R6"`}
	folder, summary := writeDataset(t, store, DatasetQuestion{ExportQuestion: ExportQuestion{Selection: selection}})

	selection.Component = ComponentAll
	list, err := RecordsQuestion{selection}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	got := RecordsAnswer{Rows: readPart[RecordRow](t, folder, "records/part-0001.parquet")}
	if string(got.csv()) != string(list.csv()) || summary.Records != len(list.Rows) {
		t.Errorf("records\n%s\nwant\n%s", got.csv(), list.csv())
	}

	var want bytes.Buffer
	if _, err := (MeasuresQuestion{selection}).Write(t.Context(), store, &want); err != nil {
		t.Fatal(err)
	}
	var l csvLine
	l.words(measuresHeader...)
	l.end()
	unknown := 0
	for _, r := range readPart[measuresRow](t, folder, "measures/part-0001.parquet") {
		l.words(r.Record, r.Component)
		v := reflect.ValueOf(r)
		for i := 2; i < v.NumField(); i++ {
			x := v.Field(i).Interface().(*float64)
			if x == nil {
				unknown++
			}
			l.number(orNaN(x))
		}
		l.end()
	}
	if string(l.text) != want.String() || unknown == 0 {
		t.Errorf("measures, %d of them unknown,\n%s\nwant\n%s", unknown, l.text, want.String())
	}

	events := readPart[eventRow](t, folder, "events/part-0001.parquet")
	if len(events) != 4 || summary.Events != 4 || events[0].Event != "Q\r\n\"'" || events[1].Event != "QA" || events[3].Event != "QC" {
		t.Fatalf("events %+v", events)
	}
	if a := events[1]; *a.Name != quakeA.Name || !a.Origin.Equal(quakeA.Origin) || *a.Magnitude != 6.5 || *a.MagnitudeType != "Mw" || *a.DepthKM != 9 || a.Latitude != nil {
		t.Errorf("event %+v, want %+v", a, quakeA)
	}
	if c := events[3]; c.Name != nil || c.Origin != nil || c.Magnitude != nil {
		t.Errorf("event %+v, of which nothing is known", c)
	}
}

// TestEventsOfOneEarthquake: of accounts of one earthquake the one whose code all have counts.
func TestEventsOfOneEarthquake(t *testing.T) {
	of := func(code, own string) motion {
		return motion{members: []*db.HeldComponent{{Record: &db.Record{Event: &db.Event{Code: code, OwnCode: own}}}}}
	}
	none := motion{members: []*db.HeldComponent{{Record: &db.Record{}}}}
	motions := []motion{of("A", "C"), of("A", "A"), none, of("A", "B"), of("0", "Z"), of("0", "Y")}
	for range 2 {
		var codes []string
		for _, e := range eventsOf(motions) {
			codes = append(codes, e.Code+e.OwnCode)
		}
		if !slices.Equal(codes, []string{"0Y", "AA"}) {
			t.Errorf("events %v", codes)
		}
		slices.Reverse(motions)
	}
}

// columnsIn are the columns that a row's tags name, with their units.
func columnsIn(t reflect.Type) (names []string, units map[string]string) {
	units = map[string]string{}
	for i := range t.NumField() {
		name, _, _ := strings.Cut(t.Field(i).Tag.Get("parquet"), ",")
		names = append(names, name)
		units[name] = t.Field(i).Tag.Get("unit")
	}
	return names, units
}

// TestColumnsHaveOneName: a column has the same name and unit wherever it stands, and a unit
// where its name has one.
func TestColumnsHaveOneName(t *testing.T) {
	records, units := columnsIn(reflect.TypeFor[RecordRow]())
	if !slices.Equal(records, recordsHeader) {
		t.Errorf("records have %v, want %v", records, recordsHeader)
	}
	if names, _ := columnsIn(reflect.TypeFor[measuresRow]()); !slices.Equal(names, measuresHeader) {
		t.Errorf("measures have %v, want %v", names, measuresHeader)
	}
	if names, _ := columnsIn(reflect.TypeFor[ordinateRow]()); strings.Join(slices.Insert(names, 2, "damping"), ",")+"\n" != exportHeader {
		t.Errorf("ordinates have %v, want %s", names, exportHeader)
	}
	for _, kind := range []reflect.Type{reflect.TypeFor[measuresRow](), reflect.TypeFor[eventRow]()} {
		_, own := columnsIn(kind)
		for name, unit := range own {
			if was, ok := units[name]; !ok || was != unit {
				t.Errorf("%s of %v is in %q, in records in %q", name, kind, unit, was)
			}
		}
	}
	inName := map[string]string{"_s": "s", "_m": "m", "_m_s": "m/s", "_m_s2": "m/s²", "_g": "g", "_km": "km", "_deg": "deg", "_hz": "Hz", "itude": "deg"}
	_, ordinates := columnsIn(reflect.TypeFor[ordinateRow]())
	for _, of := range []map[string]string{units, ordinates} {
		for name, unit := range of {
			want, longest := "", ""
			for end, u := range inName {
				if strings.HasSuffix(name, end) && len(end) > len(longest) && name != "magnitude" {
					want, longest = u, end
				}
			}
			if unit != want {
				t.Errorf("%s is in %q, want %q", name, unit, want)
			}
		}
	}
}

func TestIsOfDataset(t *testing.T) {
	for path, want := range map[string]bool{
		"records/part-0001.parquet": true, "ordinates/damping=0.05/part-0002.parquet": true, "ordinates/damping=0/part-12345.parquet": true,
		"part-0001.parquet": false, "ordinates": false, "photos/part-0001.parquet": false, "records/notes.txt": false,
		"records/part-0001.parquet.bak": false, ".git/config": false, "ordinates/damping=x/part-0001.parquet": false,
	} {
		folder := t.TempDir()
		file := filepath.Join(folder, filepath.FromSlash(path))
		if err := errors.Join(os.MkdirAll(filepath.Dir(file), 0o777), os.WriteFile(file, nil, 0o666)); err != nil {
			t.Fatal(err)
		}
		if got := eachPart(folder, IsOfDataset) == nil; got != want {
			t.Errorf("%s: %v, want %v", path, got, want)
		}
	}
}
