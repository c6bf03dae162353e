package pipeline

import (
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// listed is an event of an invented list, so many seconds after quakeTime.
func listed(id string, later, lat, lon, magnitude float64) ingest.CatalogueEvent {
	return ingest.CatalogueEvent{PublicID: id, Event: ingest.Event{
		ID: id, Origin: quakeTime.Add(seconds(later)), Latitude: ingest.Known(lat), Longitude: ingest.Known(lon),
		DepthKM: ingest.Known(10), Magnitude: ingest.Known(magnitude),
	}}
}

func TestArriving(t *testing.T) {
	// The station is 111 km north of EV1, whose waves take 14 to 45 s.
	station := ingest.Station{Latitude: ingest.Known(42), Longitude: ingest.Known(14)}
	starting := func(later float64) ingest.Channel {
		return ingest.Channel{Station: station, Start: quakeTime.Add(seconds(later)), StepS: 0.01}
	}
	events := []ingest.CatalogueEvent{listed("EV1", 0, 41, 14, 6), listed("EV2", 400, 41, 14, 5), listed("EV3", 420, 41.1, 14, 4.9)}
	for _, test := range []struct {
		name    string
		channel ingest.Channel
		want    string
	}{
		{"waves come while it records", starting(10), "EV1"},
		{"it starts within the strong motion", starting(40), "EV1"},
		{"it starts too late", starting(50), ""},
		{"it ends too early", starting(-50), ""},
		{"two events", starting(420), "EV2 EV3"},
		{"neither start nor place", ingest.Channel{StepS: 0.01, Start: time.Time{}}, ""},
	} {
		var got []string
		for _, e := range arriving(events, &test.channel, 6001, ingest.Station{}) {
			got = append(got, e.PublicID)
		}
		if strings.Join(got, " ") != test.want {
			t.Errorf("%s: %q, want %q", test.name, got, test.want)
		}
	}
}

func TestChosenQuake(t *testing.T) {
	quakes := []db.Quake{quakeOf(listed("EV1", 0, 41, 14, 6)), quakeOf(listed("EV2", 400, 41, 14, 5)), quakeOf(listed("EV3", 420, 41.1, 14, 4.9)), quakeOf(listed("EV4", 420, 41.1, 14, 4.9))}
	quakes[1].Came, quakes[2].Came = true, true
	said := func(later, lat, magnitude float64) statedEvent {
		return statedOf(listed("", later, lat, 14, magnitude).Event)
	}
	for _, test := range []struct {
		name string
		as   statedEvent
		want string
	}{
		{"what is stated decides", said(402, 41, 5), "EV2"},
		{"the nearer one, of equal ones the first", said(415, 41.1, 5), "EV3"},
		{"too far apart", said(402, 42, 5), ""},
		{"no time: the first whose waves came", statedEvent{}, "EV2"},
		{"no time: the one that gave the code", statedEvent{EventKey: db.EventKey{Code: "EV3"}}, "EV3"},
		{"no time, and a code of one whose waves did not come", statedEvent{EventKey: db.EventKey{Code: "EV1"}}, "EV2"},
	} {
		for range 4 {
			rand.Shuffle(len(quakes), func(i, j int) { quakes[i], quakes[j] = quakes[j], quakes[i] })
			got := ""
			if q := chosen(quakes, &test.as); q != nil {
				got = q.PublicID
			}
			if got != test.want {
				t.Errorf("%s: %q, want %q", test.name, got, test.want)
			}
		}
	}
}

// quakeML is a document of one invented event.
func quakeML(id, name, origin string, lat, lon, magnitude float64) string {
	return fmt.Sprintf(`<q:quakeml xmlns="http://quakeml.org/xmlns/bed/1.2" xmlns:q="http://quakeml.org/xmlns/quakeml/1.2">
<eventParameters publicID="smi:example.org/list"><event publicID="%s"><description><text>%s</text><type>earthquake name</type></description>
<origin publicID="smi:example.org/o"><time><value>%s</value></time><latitude><value>%v</value></latitude><longitude><value>%v</value></longitude>
</origin><magnitude publicID="smi:example.org/m"><mag><value>%v</value></mag><type>Mw</type></magnitude></event></eventParameters></q:quakeml>`,
		id, name, origin, lat, lon, magnitude)
}

// Two files of one event that say it a little differently, each nearest to the event of
// another document: whichever file and document come first, in one run or in two, what
// is taken is the event that is nearest to the first file by name.
func TestOrderOfQuakeMLDoesNotMatter(t *testing.T) {
	files := map[string]string{
		"a.NS": knetOf("QVA001", "38.0", "142.0", "7.2", 1), "b.NS": knetOf("QVA002", "38.3", "142.0", "6.6", 2),
		// Origin times of K-NET are nine hours ahead.
		"m.xml": quakeML("smi:example.org/m", "Moor", "2041-03-03T23:12:00.5Z", 38.02, 142, 7.1),
		"h.xml": quakeML("smi:example.org/h", "Heath", "2041-03-03T23:12:00.5Z", 38.28, 142, 6.7),
		"z.xml": quakeML("smi:example.org/z", "Elsewhere", "2041-03-03T23:12:00.5Z", 20, 142, 7.2),
	}
	const want = "20410303T231200 Moor 38.02 M7.1"
	for _, runs := range [][]string{
		{"a.NS b.NS m.xml h.xml z.xml"},
		{"a.NS m.xml h.xml", "b.NS m.xml h.xml"},
		{"b.NS m.xml h.xml", "a.NS m.xml h.xml"},
		{"a.NS b.NS m.xml", "a.NS b.NS h.xml"},
		{"a.NS b.NS h.xml", "a.NS b.NS m.xml"},
		{"b.NS m.xml h.xml", "a.NS"},
		{"a.NS b.NS", "a.NS b.NS h.xml m.xml z.xml"},
		{"a.NS b.NS", "b.NS h.xml", "a.NS m.xml"},
		{"a.NS b.NS m.xml h.xml", "a.NS b.NS h.xml"},
		{"a.NS b.NS z.xml", "a.NS h.xml", "b.NS m.xml"},
	} {
		dir, store := t.TempDir(), newStore(t)
		for _, names := range runs {
			var paths []string
			for _, name := range strings.Fields(names) {
				put(t, dir, name, files[name])
				paths = append(paths, filepath.Join(dir, name))
			}
			run(t, store, options(paths...))
		}
		for _, c := range componentsOf(t, store) {
			e := c.Record.Event
			if got := fmt.Sprint(e.Code, " ", e.Name, " ", *e.LatitudeDeg, " M", *e.Magnitude); got != want {
				t.Errorf("%q: %s is of %s, want %s", runs, c.Record.Code, got, want)
			}
		}
	}
}

// A record that knows nothing of its earthquake is of none where the waves of two came,
// and that is said, whenever the file is named.
func TestTwoQuakesAtOneTimeAreSaid(t *testing.T) {
	dir, store := t.TempDir(), newStore(t)
	for _, name := range []string{"three-channels.mseed", "station.xml", "events.xml"} {
		data, err := os.ReadFile(filepath.Join("..", "testdata", "records", "miniseed", name))
		if err != nil {
			t.Fatal(err)
		}
		put(t, dir, name, string(data))
	}
	put(t, dir, "other.xml", quakeML("smi:example.org/event/fell", "Fell", "2041-03-04T08:12:02Z", 30.2, 150.2, 5.1))
	const want = "[the waves of 2 QuakeML events came while it recorded, none of which is taken: " +
		"smi:example.org/event/tarn2041 (2041-03-04T08:12:00Z), smi:example.org/event/fell (2041-03-04T08:12:02Z)]"
	for range 2 {
		var got []string
		opts := options(dir)
		opts.Doubted = func(d Doubt) { got = append(got, d.Text) }
		run(t, store, opts)
		if fmt.Sprint(got) != want {
			t.Errorf("got  %v\nwant %s", got, want)
		}
	}
	for _, c := range componentsOf(t, store) {
		if e := c.Record.Event; e.Name != "" || !e.Origin.IsZero() { // its code is made of the record's time
			t.Errorf("%s is of %+v", c.Record.Code, c.Record.Event)
		}
	}
	// With one of them alone, it is of that, and later ones do not change it.
	if err := os.Remove(filepath.Join(dir, "other.xml")); err != nil {
		t.Fatal(err)
	}
	store = newStore(t)
	run(t, store, options(dir))
	put(t, dir, "other.xml", quakeML("smi:example.org/event/fell", "Fell", "2041-03-04T08:12:02Z", 30.2, 150.2, 5.1))
	run(t, store, options(dir))
	codes := map[string]bool{}
	for _, c := range componentsOf(t, store) {
		codes[c.Record.Event.Code+" "+c.Record.Event.Name] = true
	}
	if len(codes) != 1 || !codes["tarn2041 Tarn Ridge"] {
		t.Errorf("with one event and then another: %v", codes)
	}
}

// Two authorities have an event of one number: two earthquakes are two.
func TestEqualCodesOfTwoQuakes(t *testing.T) {
	store := newStore(t)
	quakes := []ingest.CatalogueEvent{listed("smi:a/17", 0, 41, 14, 6), listed("smi:b/17", 9000, -20, 100, 5)}
	for i := range quakes {
		quakes[i].ID = "17"
	}
	for n, i := range []int{0, 1, 0, 1} {
		err := change(t.Context(), store, func(tx *db.Tx) error {
			g, err := settleGeneration(t.Context(), tx, testGrid, nil)
			s := newSettler(tx, map[db.Statement]string{}, nil)
			c := ingest.Channel{Event: quakes[i].Event}
			err = errors.Join(err, s.distinguish(t.Context(), &c, &quakes[i]))
			a := header(fmt.Sprint("R", n), fmt.Sprint(n), c.Event, ingest.Station{})
			return errors.Join(err, a.put(t.Context(), tx, s, g),
				s.state(t.Context(), db.RecordKey{ID: int64(n + 1), EventID: int64(i + 1)}, []account{{by: db.ByMetadata, quakes: quakes[i : i+1]}}), s.settle(t.Context()))
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	var got []string
	for _, c := range componentsOf(t, store) {
		got = append(got, fmt.Sprint(c.Record.Code, " ", c.Record.Event.Code, " ", *c.Record.Event.Magnitude))
	}
	if want := "[R0 17 6 R1 17-2 5 R2 17 6 R3 17-2 5]"; fmt.Sprint(got) != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
}

// A QuakeML event has the code of another earthquake that a header or the catalogue
// names: they are two, whichever comes first, and one where both state the same.
func TestEqualCodesOfQuakeMLAndOthers(t *testing.T) {
	const there, elsewhere, unknown = "there", "elsewhere", "unknown"
	quake := listed("smi:a/17", 0, 41, 14, 6)
	quake.ID = "17"
	events := map[string]ingest.Event{there: listed("17", 5, 41.1, 14, 6.2).Event, elsewhere: listed("17", 9000, -20, 100, 5).Event, unknown: {ID: "17"}}
	for _, test := range []struct {
		by, where string
		first     bool // whether the QuakeML event comes first
		want      string
	}{
		{db.ByHeader, elsewhere, false, "[header 17 M5 metadata 17-2 M6 metadata 17-2 M6 header 17 M5]"},
		{db.ByHeader, elsewhere, true, "[metadata 17 M6 header 17-2 M5 header 17-2 M5 metadata 17 M6]"},
		{db.ByCatalogue, elsewhere, false, "[catalogue 17 M5 metadata 17-2 M6 metadata 17-2 M6 catalogue 17 M5]"},
		{db.ByCatalogue, elsewhere, true, "[metadata 17 M6 catalogue 17-2 M5 catalogue 17-2 M5 metadata 17 M6]"},
		// What is stated of it comes from both; of its magnitude the catalogue's outranks QuakeML's.
		{db.ByHeader, there, false, "[header 17 M6 metadata 17 M6 metadata 17 M6 header 17 M6]"},
		{db.ByHeader, there, true, "[metadata 17 M6 header 17 M6 header 17 M6 metadata 17 M6]"},
		{db.ByCatalogue, there, false, "[catalogue 17 M6.2 metadata 17 M6.2 metadata 17 M6.2 catalogue 17 M6.2]"},
		{db.ByCatalogue, there, true, "[metadata 17 M6.2 catalogue 17 M6.2 catalogue 17 M6.2 metadata 17 M6.2]"},
		{db.ByHeader, unknown, false, "[header 17 M6 metadata 17 M6 metadata 17 M6 header 17 M6]"},
		{db.ByHeader, unknown, true, "[metadata 17 M6 header 17 M6 header 17 M6 metadata 17 M6]"},
	} {
		order := []string{test.by, db.ByMetadata, db.ByMetadata, test.by}
		if test.first {
			order = []string{db.ByMetadata, test.by, test.by, db.ByMetadata}
		}
		for _, batch := range []int{1, 4} { // what is read of an event once is read again when more is stated
			store := newStore(t)
			at := 0
			for part := range slices.Chunk(order, batch) {
				err := change(t.Context(), store, func(tx *db.Tx) error {
					g, err := settleGeneration(t.Context(), tx, testGrid, nil)
					s := newSettler(tx, map[db.Statement]string{}, nil)
					for _, by := range part {
						err = errors.Join(err, putOf(t.Context(), tx, s, g, at, by, events[test.where], &quake))
						at++
					}
					return errors.Join(err, s.settle(t.Context()))
				})
				if err != nil {
					t.Fatal(err)
				}
			}
			var got []string
			for i, c := range componentsOf(t, store) {
				got = append(got, fmt.Sprint(order[i], " ", c.Record.Event.Code, " M", *c.Record.Event.Magnitude))
			}
			if fmt.Sprint(got) != test.want {
				t.Errorf("%s %s, %d a batch:\ngot  %v\nwant %s", test.by, test.where, batch, got, test.want)
			}
		}
	}
}

// putOf stores one more record, of the QuakeML event or of the event that a header or
// the catalogue states.
func putOf(ctx context.Context, tx *db.Tx, s *settler, g db.Generation, n int, by string, e ingest.Event, quake *ingest.CatalogueEvent) error {
	c, given := ingest.Channel{Event: e}, (*ingest.CatalogueEvent)(nil)
	said := account{by: by, source: fmt.Sprint(n), channel: c}
	switch by {
	case db.ByHeader:
		said.scheme = "esm"
	case db.ByMetadata:
		c.Event, given = quake.Event, quake
		said = account{by: by, source: "metadata", quakes: []ingest.CatalogueEvent{*quake}}
	}
	if err := s.distinguish(ctx, &c, given); err != nil {
		return err
	}
	key, err := tx.PutRecord(ctx, recordOf(c, fmt.Sprint("R", n)), false)
	if err != nil {
		return err
	}
	return errors.Join(addComponent(ctx, tx, key, fmt.Sprint(n), g), s.state(ctx, key, []account{said}))
}

// Of two versions of one QuakeML event the later counts, by what they say of when they
// came about, else by the order of reading, in one run or in two; what moved away is no
// more of the event.
func TestVersionsOfOneQuakeML(t *testing.T) {
	version := func(created, origin string, lat, magnitude float64) string {
		text := quakeML("smi:example.org/moor", "Moor", origin, lat, 142, magnitude)
		if created != "" {
			text = strings.Replace(text, "</event>", "<creationInfo><creationTime>"+created+"</creationTime></creationInfo></event>", 1)
		}
		return text
	}
	// Origin times of K-NET are nine hours ahead.
	const at, later = "2041-03-03T23:12:00.5Z", "2041-03-04T05:00:00Z"
	early, revised := version("2041-03-04T00:00:00Z", at, 38.01, 7.1), version("2041-03-05T00:00:00Z", at, 38.02, 7.3)
	moved := version("2041-03-05T00:00:00Z", later, 38.02, 7.3)
	undated, undatedRevised, undatedMoved := version("", at, 38.01, 7.1), version("", at, 38.02, 7.3), version("", later, 38.02, 7.3)
	withdrawn := func(created string) string {
		return strings.Replace(version(created, at, 38.01, 7.1), "</event>", "<type>not existing</type></event>", 1)
	}
	const isEarly, isRevised, none = "Moor 38.01 M7.1, 1 held", "Moor 38.02 M7.3, 1 held", " 38 M7.2, 0 held"
	for _, test := range []struct {
		name, first, second string
		want                string
	}{
		{"the later one second", early, revised, isRevised},
		{"the later one first", revised, early, isRevised},
		{"undated: the last read", undated, undatedRevised, isRevised},
		{"undated: the last read, the other way round", undatedRevised, undated, isEarly},
		{"one undated: the last read", revised, undated, isEarly},
		{"moved away", early, moved, none},
		{"moved away, read first", moved, early, none},
		{"moved away, undated", undated, undatedMoved, none},
		{"moved to it, undated", undatedMoved, undated, isEarly},
		{"withdrawn", early, withdrawn("2041-03-05T00:00:00Z"), none},
		{"withdrawn, read first", withdrawn("2041-03-05T00:00:00Z"), early, none},
		{"withdrawn, undated", undated, withdrawn(""), none},
		{"withdrawn before", revised, withdrawn("2041-03-04T00:00:00Z"), isRevised},
		{"withdrawn before, read first", withdrawn("2041-03-04T00:00:00Z"), revised, isRevised},
	} {
		for _, runs := range []string{"1.xml 2.xml", "1.xml|2.xml", "1.xml|2.xml|2.xml"} {
			if test.name == "moved away, read first" && runs != "1.xml 2.xml" {
				continue // of what was never near nothing is known
			}
			dir, store := t.TempDir(), newStore(t)
			put(t, dir, "a.NS", knetOf("QVA001", "38.0", "142.0", "7.2", 1))
			put(t, dir, "1.xml", test.first)
			put(t, dir, "2.xml", test.second)
			for documents := range strings.SplitSeq(runs, "|") {
				paths := []string{filepath.Join(dir, "a.NS")}
				for _, name := range strings.Fields(documents) {
					paths = append(paths, filepath.Join(dir, name))
				}
				run(t, store, options(paths...))
			}
			e := componentsOf(t, store)[0].Record.Event
			if got := fmt.Sprintf("%s %v M%v, %d held", e.Name, *e.LatitudeDeg, *e.Magnitude, len(quakesOf(t, store, e.Code))); got != test.want {
				t.Errorf("%s, %s: %q, want %q", test.name, runs, got, test.want)
			}
		}
	}
}

// quakesOf are the QuakeML events that may be the event of this code.
func quakesOf(t *testing.T, store *db.Store, code string) (quakes []db.Quake) {
	t.Helper()
	err := change(t.Context(), store, func(tx *db.Tx) error {
		key, ok, err := tx.FindEvent(t.Context(), code)
		if err != nil || !ok {
			return errors.Join(err, fmt.Errorf("no event %s", code))
		}
		quakes, err = tx.Quakes(t.Context(), key.ID)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return quakes
}

func TestLaterVersion(t *testing.T) {
	version := func(created, later float64, came bool) db.Quake {
		e := listed("smi:a/17", later, 41, 14, 6)
		if created != 0 {
			e.Created = quakeTime.Add(seconds(created))
		}
		q := quakeOf(e)
		q.Came = came
		return q
	}
	for _, test := range []struct {
		name        string
		held, q     db.Quake
		origin      float64 // seconds later
		came, moved bool
	}{
		{"revised: what came still did", version(1, 0, true), version(2, 5, false), 5, true, false},
		{"moved: it came by the earlier version alone", version(1, 0, true), version(2, 9000, false), 9000, false, true},
		{"moved: it came by the later one", version(1, 0, false), version(2, 9000, true), 9000, true, true},
		{"an earlier one is read last", version(2, 5, false), version(1, 0, true), 5, true, false},
		{"an earlier one far away is read last", version(2, 9000, false), version(1, 0, true), 9000, false, true},
		{"undated is read last", version(2, 5, true), version(0, 0, false), 0, true, false},
	} {
		got, moved := laterVersion(test.held, test.q)
		if later := got.Origin.Sub(quakeTime).Seconds(); later != test.origin || got.Came != test.came || moved != test.moved {
			t.Errorf("%s: %g s later, came %t, moved %t", test.name, later, got.Came, moved)
		}
	}
}
