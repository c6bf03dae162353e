package pipeline

import (
	"fmt"
	"path/filepath"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/ingest"
)

// Rows of a catalogue for single files may contradict each other in an event that only the
// files name. What is taken does not depend on the order of runs, and all of it is held.
func TestRowsForFilesThatContradictEachOther(t *testing.T) {
	dir := t.TempDir()
	put(t, dir, "a.NS", knetOf("QVA001", "38.0", "142.0", "6.0", 1))
	put(t, dir, "b.NS", knetOf("QVA002", "38.1", "142.0", "6.0", 2))
	const rows = "file,magnitude,magnitude_type,vs30_m_s\na.NS,6.4,Mw,300\nb.NS,6.1,Mw,500\n"
	const first = "a.NS 6.4 Mw, b.NS 6.1 Mw, header 6 MJMA"
	tests := []struct {
		name string
		runs []catalogueRun
		want string
	}{
		{"one run", []catalogueRun{{rows, "."}}, first},
		{"one after the other", []catalogueRun{{rows, "a.NS"}, {rows, "b.NS"}}, first},
		{"the other way round", []catalogueRun{{rows, "b.NS"}, {rows, "a.NS"}}, first},
		{"again", []catalogueRun{{rows, "."}, {rows, "."}}, first},
		{"without catalogue first", []catalogueRun{{"", "."}, {rows, "b.NS"}, {rows, "a.NS"}}, first},
		{"a row corrected", []catalogueRun{{rows, "."}, {"file,magnitude\na.NS,6.2\n", "."}}, "a.NS 6.2, b.NS 6.1 Mw, header 6 MJMA"},
		{"all rows corrected", []catalogueRun{{rows, "."}, {"file,magnitude\n*.NS,6.2\n", "."}}, "a.NS 6.2, header 6 MJMA"},
		{"by the event", []catalogueRun{{rows, "."}, {"event,magnitude\n20410303T231200,6.3\n", "."}}, "codes 6.3, header 6 MJMA"},
		{"by the event, of one file", []catalogueRun{{rows, "."}, {"event,magnitude\n20410303T231200,6.3\n", "a.NS"}}, "b.NS 6.1 Mw, codes 6.3, header 6 MJMA"},
		{"by the event and a file", []catalogueRun{{"event,file,magnitude\n20410303T231200,,6.3\n,b.NS,6.5\n", "."}}, "b.NS 6.5, codes 6.3, header 6 MJMA"},
		{"a file that names the event", []catalogueRun{{"event,file,magnitude\nE1,a.NS,6.3\nE1,b.NS,6.3\n", "."}}, "codes 6.3, header 6 MJMA"},
		{"a type alone says nothing", []catalogueRun{{"file,magnitude_type\na.NS,Mw\n", "."}}, "header 6 MJMA"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			store := newStore(t)
			for _, r := range tt.runs {
				opts := options(filepath.Join(dir, r.path))
				if r.rows != "" {
					c, err := ingest.ReadCatalogue("c.csv", strings.NewReader(r.rows))
					if err != nil {
						t.Fatal(err)
					}
					opts.Catalogue = c
				}
				run(t, store, opts)
			}
			if got := magnitudesOf(t, store); got != tt.want {
				t.Errorf("%s, expected %s", got, tt.want)
			}
		})
	}
}

type catalogueRun struct{ rows, path string }

// magnitudesOf lists what is stated of the magnitude of the store's event, the value to
// take first, and checks that it is taken.
func magnitudesOf(t *testing.T, store *db.Store) string {
	t.Helper()
	e := componentsOf(t, store)[0].Record
	var out []string
	err := change(t.Context(), store, func(tx *db.Tx) error {
		all, err := tx.Statements(t.Context(), db.Subject{Kind: db.SubjectEvent, ID: e.EventID})
		for _, s := range all {
			if s.Attribute != db.AttributeMagnitude {
				continue
			}
			by := s.By
			if by == db.ByCatalogue {
				by = filepath.Base(s.Source)
			}
			if s.Source == db.CodeRows {
				by = "codes"
			}
			if len(out) == 0 {
				if taken := strings.TrimSpace(fmt.Sprint(*e.Event.Magnitude, " ", e.Event.MagnitudeType)); taken != s.Value {
					t.Errorf("%s is taken of %s", taken, s.Value)
				}
			}
			out = append(out, by+" "+s.Value)
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return strings.Join(out, ", ")
}
