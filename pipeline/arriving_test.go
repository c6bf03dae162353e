package pipeline

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"swaybook/ingest"
)

func TestReading(t *testing.T) {
	account := func(id string, later, lat, magnitude, km float64) arrival {
		a := arrival{listed(id, later, lat, 14, magnitude), km}
		a.Magnitude.Known = magnitude != 0
		return a
	}
	one, other := account("smi:a/1", 0, 41, 6, 80), account("smi:b/1", 4, 41.2, 5.6, 80)
	for _, test := range []struct {
		name string
		came []arrival
		want string // the accounts, "" for none
		says string // part of the remark or the doubt
	}{
		{"none", nil, "", ""},
		{"one", []arrival{one}, "smi:a/1", ""},
		{"two accounts of one", []arrival{other, one}, "smi:a/1 smi:b/1", ""},
		{"the one with a magnitude first", []arrival{account("smi:a/1", 0, 41, 0, 80), other}, "smi:b/1 smi:a/1", ""},
		{"two of one authority", []arrival{one, account("smi:a/2", 4, 41.2, 5.6, 80)}, "", "2 QuakeML events came"},
		{"two at other places", []arrival{one, account("smi:b/1", 0, 42, 6, 80)}, "", "2 QuakeML events came"},
		{"a small one", []arrival{one, other, account("smi:a/2", 5, 41, 4.1, 80)}, "smi:a/1 smi:b/1", "2 earthquakes came while it recorded, and the largest by 1.5 is taken: smi:a/1 "},
		{"a small one just below", []arrival{account("smi:a/2", 5, 41, 4.2, 80), account("smi:a/1", 0, 41, 5.7, 80)}, "smi:a/1", "2 earthquakes came"},
		{"one that is not so small", []arrival{one, account("smi:a/2", 5, 41, 4.51, 80)}, "", "2 QuakeML events came"},
		{"one of unknown size", []arrival{one, account("smi:a/2", 5, 41, 0, 80)}, "", "2 QuakeML events came"},
		{"a small one, half as far", []arrival{one, account("smi:a/2", 5, 41, 4.1, 40)}, "smi:a/1", "2 earthquakes came"},
		{"a small one, nearer", []arrival{one, account("smi:a/2", 5, 41, 4.1, 39)}, "", "none of which is taken: smi:a/1 (2026-03-12T10:15:30Z), smi:a/2"},
	} {
		quakes, remark, doubt := reading(test.came)
		var got []string
		for _, q := range quakes {
			got = append(got, q.PublicID)
		}
		if said := remark + doubt; strings.Join(got, " ") != test.want || !strings.Contains(said, test.says) || (said == "") != (test.says == "") {
			t.Errorf("%s: %q %q, want %q %q", test.name, got, said, test.want, test.says)
		}
	}
}

func TestSchemeOfQuakes(t *testing.T) {
	for id, want := range map[string]string{
		"smi:a.org/event/1": "metadata/a.org", "quakeml:b.gov/query?eventid=1": "metadata/b.gov", "https://c.org/1": "metadata/c.org",
		"17": "metadata/17", "smi:17": "metadata/17", "20410304T081200.5Z_30_150": "metadata/20410304T081200.5Z_30_150",
	} {
		if got := schemeOfQuakes(id); got != want {
			t.Errorf("%s: %s, want %s", id, got, want)
		}
	}
}

// Accounts of one earthquake in several documents, and a small earthquake in the same
// seconds, whose waves came while a record ran that says nothing of its earthquake: what is
// taken does not depend on which document came first, in one run or in several.
func TestAccountsOfOneEarthquake(t *testing.T) {
	const at = "2041-03-04T08:12:00.5Z"
	documents := map[string]string{
		"moor":  quakeML("smi:a.example.org/event/moor", "Moor", at, 30.125, 150.25, 5.7),
		"mere":  quakeML("smi:b.example.org/event/mere", "Mere", "2041-03-04T08:12:02Z", 30.15, 150.25, 5.8),
		"small": quakeML("smi:b.example.org/event/small", "Small", "2041-03-04T08:12:05Z", 30.125, 150.25, 3.1),
	}
	for _, runs := range []string{
		"moor mere", "moor|mere", "mere|moor", "moor|moor mere", "mere|moor mere", "mere|moor|mere",
		"moor mere small", "small|moor mere", "small|mere|moor", "moor|small|mere", "small mere|small moor", "small|small moor mere", "mere small|moor|small",
	} {
		dir, store := t.TempDir(), newStore(t)
		for _, name := range []string{"three-channels.mseed", "station.xml"} {
			data, err := os.ReadFile(filepath.Join("..", "testdata", "records", "miniseed", name))
			if err != nil {
				t.Fatal(err)
			}
			put(t, dir, name, string(data))
		}
		for names := range strings.SplitSeq(runs, "|") {
			paths := []string{filepath.Join(dir, "three-channels.mseed"), filepath.Join(dir, "station.xml")}
			for _, name := range strings.Fields(names) {
				put(t, dir, name+".xml", documents[name])
				paths = append(paths, filepath.Join(dir, name+".xml"))
			}
			opts := options(paths...)
			opts.Doubted = func(d Doubt) { t.Errorf("%s: %s", runs, d.Text) }
			run(t, store, opts)
		}
		for _, c := range componentsOf(t, store) {
			e := c.Record.Event
			if got := fmt.Sprintf("%s %s %v M%v", e.Name, e.Origin.Format("15:04:05.0"), *e.LatitudeDeg, *e.Magnitude); got != "Moor 08:12:00.5 30.125 M5.7" {
				t.Errorf("%s: %s %s is of %s", runs, c.Record.Code, c.Role, got)
			}
			if km := c.Record.Distances.EpicentralKM; km == nil || *km < 63 || *km > 64 {
				t.Errorf("%s: %s at %v km", runs, c.Record.Code, km)
			}
		}
	}
}

// Events that have their codes of two authorities' accounts, in two runs, are associated.
func TestAccountsOfTwoAuthoritiesAreAssociated(t *testing.T) {
	a, b := listed("smi:a/1", 0, 41, 14, 6), listed("smi:b/1", 4, 41.2, 14, 5.6)
	as := func(e ingest.CatalogueEvent) statedEvent {
		s := statedOf(e.Event)
		s.EventKey.Code = e.PublicID
		s.identifiers = []string{schemeOfQuakes(e.PublicID) + ":" + e.PublicID}
		return s
	}
	if got := associate([]statedEvent{as(b), as(a)}); got[0] != 1 || got[1] != 1 {
		t.Errorf("they stand for themselves: %v", got)
	}
}
