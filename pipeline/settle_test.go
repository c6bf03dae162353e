package pipeline

import (
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

func value(x float64) *float64 { return &x }

var quakeTime = time.Date(2026, 3, 12, 10, 15, 30, 0, time.UTC)

// quake is an event of an invented earthquake, so many seconds later.
func quake(code string, later float64, lat, lon, magnitude *float64, identifiers ...string) statedEvent {
	e := statedEvent{identifiers: identifiers, Event: db.Event{
		Origin: quakeTime.Add(time.Duration(later * float64(time.Second))), LatitudeDeg: lat, LongitudeDeg: lon, Magnitude: magnitude,
	}}
	e.EventKey.Code = code
	return e
}

func TestAssociate(t *testing.T) {
	lat, lon := value(41.2), value(14.8)
	near, far := value(41.4), value(42.2) // 22 km and 111 km north
	tests := []struct {
		name   string
		events []statedEvent
		want   map[string]string // the code that stands for another
	}{
		{"no id joins the one with", []statedEvent{quake("T1", 3, near, lon, value(5.9)), quake("EV1", 0, lat, lon, value(6.1), "esm:EV1")}, map[string]string{"T1": "EV1"}},
		{"too late", []statedEvent{quake("T1", 11, near, lon, value(6)), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
		{"too far", []statedEvent{quake("T1", 1, far, lon, value(6)), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
		{"another size", []statedEvent{quake("T1", 1, lat, lon, value(4.5)), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
		{"time alone", []statedEvent{quake("T1", 2, nil, nil, nil), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, map[string]string{"T1": "EV1"}},
		{"time alone, too late", []statedEvent{quake("T1", 3, nil, nil, nil), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
		{"told apart by one scheme", []statedEvent{quake("EV2", 5, lat, lon, value(6), "esm:EV2"), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
		{"two schemes", []statedEvent{quake("EV2", 5, lat, lon, value(6), "smc:EV2"), quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, map[string]string{"EV2": "EV1"}},
		{"one identifier under two codes", []statedEvent{quake("B", 50, far, lon, value(3), "metadata:X"), quake("A", 0, lat, lon, value(6), "metadata:X")}, map[string]string{"B": "A"}},
		{"the nearer of two", []statedEvent{quake("T1", 7, lat, lon, value(6)), quake("EV1", 0, lat, lon, value(6), "esm:1"), quake("EV2", 9, lat, lon, value(6), "esm:2")}, map[string]string{"T1": "EV2"}},
		{"no time", []statedEvent{{EventKey: db.EventKey{Code: "N"}}, quake("EV1", 0, lat, lon, value(6), "esm:EV1")}, nil},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			for range 6 { // in several orders
				rand.Shuffle(len(test.events), func(i, j int) { test.events[i], test.events[j] = test.events[j], test.events[i] })
				got := map[string]string{}
				for i, p := range associate(test.events) {
					if p != i {
						got[test.events[i].EventKey.Code] = test.events[p].EventKey.Code
					}
				}
				if len(got) != len(test.want) || len(got) > 0 && fmt.Sprint(got) != fmt.Sprint(test.want) {
					t.Fatalf("got %v, want %v", got, test.want)
				}
			}
		})
	}
}

// inventedAccount is what one file says.
type inventedAccount struct {
	code    string // of the record
	account account
}

func header(code, source string, e ingest.Event, s ingest.Station) inventedAccount {
	return inventedAccount{code, account{by: db.ByHeader, source: source, scheme: "esm", channel: ingest.Channel{Event: e, Station: s}}}
}

// invented are files of one earthquake under four codes, of an aftershock and of
// another earthquake at the time of the first.
func invented() []inventedAccount {
	at := func(seconds int) time.Time { return quakeTime.Add(time.Duration(seconds) * time.Second) }
	place := func(e ingest.Event, lat, lon, magnitude float64) ingest.Event {
		e.Latitude, e.Longitude, e.Magnitude, e.MagnitudeType = ingest.Known(lat), ingest.Known(lon), ingest.Known(magnitude), "Mw"
		return e
	}
	station := func(code string, lat, lon float64) ingest.Station {
		return ingest.Station{Network: "XX", Code: code, Latitude: ingest.Known(lat), Longitude: ingest.Known(lon)}
	}
	deep := place(ingest.Event{ID: "EV1", Origin: at(0)}, 41, 14, 6.1)
	deep.DepthKM = ingest.Known(10)
	other := place(ingest.Event{ID: "EV1", Origin: at(1)}, 41, 14, 6.3)
	catalogued := account{by: db.ByCatalogue, source: "catalogue", channel: ingest.Channel{Event: ingest.Event{ID: "EV1", Magnitude: ingest.Known(6.2)}}}
	first := header("R1", "a", deep, station("AAA", 41, 15))
	return []inventedAccount{
		first, {first.code, catalogued},
		header("R2", "b", other, station("BBB", 41.5, 14)),
		header("R3", "c", place(ingest.Event{Origin: at(3)}, 41.1, 14.1, 5.9), station("AAA", 41, 15.01)),
		header("R4", "d", place(ingest.Event{Origin: at(-4)}, 40.9, 14, 6), station("CCC", 40, 14)),
		header("R5", "e", ingest.Event{Origin: at(12)}, station("CCC", 40, 14)),
		header("R6", "f", place(ingest.Event{ID: "EV2", Origin: at(8)}, 41, 14, 5.5), station("DDD", 42, 14)),
		header("R7", "g", place(ingest.Event{Origin: at(0)}, -20, 100, 6), station("EEE", -21, 100)),
	}
}

// settled stores the accounts in batches and returns what is taken of them.
func settled(t *testing.T, accounts []inventedAccount, batch int) (*db.Store, []string) {
	t.Helper()
	store := newStore(t)
	known := map[db.Statement]string{}
	for part := range slices.Chunk(accounts, batch) {
		err := change(t.Context(), store, func(tx *db.Tx) error {
			g, err := settleGeneration(t.Context(), tx, testGrid, nil)
			s := newSettler(tx, known, nil)
			for _, a := range part {
				err = errors.Join(err, s.distinguish(t.Context(), &a.account.channel, nil), a.put(t.Context(), tx, s, g))
			}
			return errors.Join(err, s.settle(t.Context()))
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	var out []string
	for _, c := range componentsOf(t, store) {
		e, km := c.Record.Event, c.Record.Distances
		out = append(out, fmt.Sprintf("%s %s %s M%s depth %s epicentral %s hypocentral %s best %s", c.Record.Code, e.Code, e.Origin.Format(time.TimeOnly),
			show(e.Magnitude), show(e.DepthKM), show(km.EpicentralKM), show(km.HypocentralKM), show(km.BestKM)))
	}
	return store, out
}

// put stores the account, and with a header's a component, so that the record can
// be seen.
func (a inventedAccount) put(ctx context.Context, tx *db.Tx, s *settler, g db.Generation) error {
	key, err := tx.PutRecord(ctx, recordOf(a.account.channel, a.code), false)
	if err != nil || a.account.by != db.ByHeader {
		return errors.Join(err, s.state(ctx, key, []account{a.account}))
	}
	return errors.Join(addComponent(ctx, tx, key, a.account.source, g), s.state(ctx, key, []account{a.account}))
}

// addComponent gives the record a component, of a file of its own.
func addComponent(ctx context.Context, tx *db.Tx, key db.RecordKey, path string, g db.Generation) error {
	run, err := tx.StartRun(ctx, "ingest", "test", quakeTime)
	if err != nil {
		return err
	}
	source, err := tx.AddSource(ctx, db.Source{Path: path, SHA256: path, Format: "invented"}, run)
	if err != nil {
		return err
	}
	sum := fnv.New32a()
	sum.Write([]byte(path))
	data, digest := db.EncodeSamples([]float64{0, float64(sum.Sum32())}, 1) // no two alike
	spectra := db.NewSpectra([][]float64{{1, 1, 1}, {1, 1, 1}}, nil, nil)
	c := db.Component{Role: db.RoleH1, Axis: "horizontal", StepS: 0.01, Samples: 2, SourceID: source}
	return tx.AddComponent(ctx, key.ID, c, data, digest, g.ID, &spectra)
}

func show(x *float64) string {
	if x == nil {
		return "-"
	}
	return fmt.Sprint(math.Round(*x*10) / 10)
}

func TestWhatIsTakenDependsOnStatementsAlone(t *testing.T) {
	// EV1 stands for the events of R3 and R4, which state no identifier; R5 states
	// a time alone, too late for EV1 and too far from EV2's; EV2 is told apart by
	// its identifier. The catalogue gives EV1 its magnitude. A degree of latitude
	// at 41° is 111.0 km, one of longitude 84.1 km (common practice).
	want := []string{
		"R1 EV1 10:15:30 M6.2 depth 10 epicentral 84.1 hypocentral 84.7 best 84.7",
		"R2 EV1 10:15:30 M6.2 depth 10 epicentral 55.5 hypocentral 56.4 best 56.4",
		"R3 EV1 10:15:30 M6.2 depth 10 epicentral 84.1 hypocentral 84.7 best 84.7",
		"R4 EV1 10:15:30 M6.2 depth 10 epicentral 111 hypocentral 111.5 best 111.5",
		"R5 20260312T101542 10:15:42 M- depth - epicentral - hypocentral - best -",
		"R6 EV2 10:15:38 M5.5 depth - epicentral 111.1 hypocentral - best 111.1",
		"R7 20260312T101530 10:15:30 M6 depth - epicentral 110.7 hypocentral - best 110.7",
	}
	rng := rand.New(rand.NewPCG(4, 5))
	for range 12 {
		accounts := invented()
		rng.Shuffle(len(accounts), func(i, j int) { accounts[i], accounts[j] = accounts[j], accounts[i] })
		batch := 1 + rng.IntN(len(accounts))
		if _, got := settled(t, accounts, batch); !slices.Equal(got, want) {
			t.Fatalf("in batches of %d:\ngot  %s\nwant %s", batch, strings.Join(got, "\n     "), strings.Join(want, "\n     "))
		}
	}
}

// Events that follow one another within the tolerance, and sources of one value on
// both sides of another's: what comes first, or in one batch, does not matter.
func TestChainsSettleAlike(t *testing.T) {
	at := func(code, source, id string, later float64) inventedAccount {
		e := ingest.Event{ID: id, Origin: quakeTime.Add(seconds(later)), Latitude: ingest.Known(41), Longitude: ingest.Known(14)}
		return header(code, source, e, ingest.Station{})
	}
	placed := func(code, source string, lat float64) inventedAccount {
		s := ingest.Station{Network: "XX", Code: "AAA", Latitude: ingest.Known(lat), Longitude: ingest.Known(14)}
		return header(code, source, ingest.Event{ID: "far", Latitude: ingest.Known(40), Longitude: ingest.Known(14)}, s)
	}
	accounts := []inventedAccount{
		at("R1", "a", "EV1", 8), at("R2", "b", "", 0), at("R3", "c", "", -5), at("R4", "d", "", -14),
		placed("R5", "e", 41), placed("R6", "m", 42), placed("R7", "z", 41),
	}
	_, want := settled(t, accounts, len(accounts))
	if !strings.Contains(want[4], "epicentral 111 ") {
		t.Fatalf("of a, m and z that of a is taken: %s", want[4])
	}
	rng := rand.New(rand.NewPCG(6, 7))
	for range 20 {
		rng.Shuffle(len(accounts), func(i, j int) { accounts[i], accounts[j] = accounts[j], accounts[i] })
		if _, got := settled(t, accounts, 1+rng.IntN(3)); !slices.Equal(got, want) {
			t.Fatalf("got  %s\nwant %s", strings.Join(got, "\n     "), strings.Join(want, "\n     "))
		}
	}
}

// Swarms in which any event may be another by time, place and magnitude, some of whole
// minutes and some with codes: which come first, or in one batch, does not matter.
func TestSwarmsSettleAlike(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	joined := 0
	for range 12 {
		var accounts []inventedAccount
		for i, second := range rng.Perm(150)[:14] {
			e := ingest.Event{Origin: quakeTime.Add(time.Duration(second) * time.Second)}
			if i%5 == 0 {
				e.Origin = e.Origin.Truncate(time.Minute).Add(time.Duration(i%2) * time.Minute)
			}
			if i%4 == 0 {
				e.ID = fmt.Sprintf("EV%d", i)
			}
			if i%3 != 0 {
				e.Latitude, e.Longitude = ingest.Known(41+0.5*rng.Float64()), ingest.Known(14)
			}
			if i%2 == 0 {
				e.Magnitude = ingest.Known(4 + 1.5*rng.Float64())
			}
			accounts = append(accounts, header(fmt.Sprintf("R%02d", i), fmt.Sprint(rng.IntN(1000), i), e, ingest.Station{}))
		}
		_, want := settled(t, accounts, len(accounts))
		for i, line := range want {
			if code := strings.Fields(line)[1]; code != ingest.EventCode(&accounts[i].account.channel) {
				joined++
			}
		}
		for range 3 {
			shuffled := slices.Clone(accounts)
			rng.Shuffle(len(shuffled), func(i, j int) { shuffled[i], shuffled[j] = shuffled[j], shuffled[i] })
			if _, got := settled(t, shuffled, 1+rng.IntN(4)); !slices.Equal(got, want) {
				t.Fatalf("got  %s\nwant %s", strings.Join(got, "\n     "), strings.Join(want, "\n     "))
			}
		}
	}
	if joined < 12 {
		t.Errorf("only %d events joined another", joined)
	}
}

// A catalogue that says something else replaces what it said before; headers keep
// their say.
func TestALaterCatalogueReplacesTheEarlier(t *testing.T) {
	magnitude := func(m float64) inventedAccount {
		c := ingest.Channel{Event: ingest.Event{ID: "EV1", Magnitude: ingest.Known(m)}}
		return inventedAccount{"R1", account{by: db.ByCatalogue, source: "catalogue", channel: c}}
	}
	files := invented()[:1]
	for _, test := range []struct {
		accounts []inventedAccount
		want     string
	}{
		{files, "M6.1"},
		{append(slices.Clone(files), magnitude(6.4)), "M6.4"},
		{append(slices.Clone(files), magnitude(6.4), magnitude(5.9)), "M5.9"},
	} {
		if _, got := settled(t, test.accounts, 1); len(got) != 1 || !strings.Contains(got[0], test.want) {
			t.Errorf("got %v, want %s", got, test.want)
		}
	}
}

// knetOf is an invented file of an earthquake at the station, without a code.
func knetOf(station, lat, lon, magnitude string, seed uint64) string {
	rng := rand.New(rand.NewPCG(seed, 1))
	var b strings.Builder
	for _, line := range [][2]string{
		{"Origin Time", "2041/03/04 08:12:00"}, {"Lat.", lat}, {"Long.", lon}, {"Depth. (km)", "10"}, {"Mag.", magnitude},
		{"Station Code", station}, {"Station Lat.", lat}, {"Station Long.", lon}, {"Station Height(m)", "10"},
		{"Record Time", "2041/03/04 08:12:30"}, {"Sampling Freq(Hz)", "100Hz"}, {"Duration Time(s)", "1"}, {"Dir.", "N-S"},
		{"Scale Factor", "2000(gal)/8388608"}, {"Max. Acc. (gal)", ""}, {"Last Correction", ""}, {"Memo.", ""},
	} {
		fmt.Fprintf(&b, "%-18s%s\n", line[0], line[1])
	}
	for range 100 {
		fmt.Fprintln(&b, rng.IntN(20000)-10000)
	}
	return b.String()
}

// Two earthquakes of one second, whose headers have no code for them, are two.
func TestEqualTimesOfTwoEarthquakes(t *testing.T) {
	dir := t.TempDir()
	knet := func(name, station, lat, lon, magnitude string, seed uint64) {
		put(t, dir, name, knetOf(station, lat, lon, magnitude, seed))
	}
	knet("a.NS", "QVA001", "38.0", "142.0", "7.2", 1)
	knet("b.NS", "QVA002", "33.0", "131.0", "4.0", 2)
	knet("c.NS", "QVA003", "38.1", "142.0", "7.1", 3)
	store := newStore(t)
	run(t, store, options(dir))
	var got []string
	for _, c := range componentsOf(t, store) {
		got = append(got, fmt.Sprint(c.Record.Code, " ", *c.Record.Event.Magnitude))
	}
	want := "[20410303T231200-2_QVA002 4 20410303T231200_QVA001 7.2 20410303T231200_QVA003 7.2]"
	if fmt.Sprint(got) != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
}

// What the catalogue states of an event after a file of it was read tells the next one
// apart, in one batch or several.
func TestEqualTimesAcrossBatches(t *testing.T) {
	at := func(lat float64) ingest.Event {
		return ingest.Event{Origin: quakeTime, Latitude: ingest.Known(lat), Longitude: ingest.Known(14)}
	}
	alone := header("R1", "a", ingest.Event{Origin: quakeTime}, ingest.Station{})
	described := inventedAccount{"R1", account{by: db.ByCatalogue, source: db.CodeRows, channel: ingest.Channel{Event: at(41)}}}
	accounts := []inventedAccount{alone, header("R2", "b", ingest.Event{Origin: quakeTime}, ingest.Station{}), described,
		header("R3", "c", at(-20), ingest.Station{}), header("R4", "d", at(41.1), ingest.Station{})}
	for _, batch := range []int{1, len(accounts)} {
		_, got := settled(t, accounts, batch)
		var codes []string
		for _, line := range got {
			codes = append(codes, strings.Join(strings.Fields(line)[:2], " "))
		}
		if want := "[R1 20260312T101530 R2 20260312T101530 R3 20260312T101530-2 R4 20260312T101530]"; fmt.Sprint(codes) != want {
			t.Errorf("%d a batch:\ngot  %v\nwant %s", batch, codes, want)
		}
	}
}

// A catalogue that moves a held record to an event of its own takes along what its
// header says of the earthquake.
func TestACatalogueMovesARecordWithItsHeader(t *testing.T) {
	files := invented()[:1]
	store, _ := settled(t, files, 1)
	held := componentsOf(t, store)[0]
	err := change(t.Context(), store, func(tx *db.Tx) error {
		s := newSettler(tx, map[db.Statement]string{}, nil)
		c := ingest.Channel{Event: ingest.Event{ID: "NEW"}}
		key, err := tx.PutRecord(t.Context(), recordOf(c, "R1"), true)
		return errors.Join(err, s.move(t.Context(), held.Record, key), s.state(t.Context(), key, nil), s.settle(t.Context()))
	})
	if err != nil {
		t.Fatal(err)
	}
	r := componentsOf(t, store)[0].Record
	if r.Event.OwnCode != "NEW" || show(r.Event.Magnitude) != "6.1" || show(r.Distances.EpicentralKM) != "84.1" {
		t.Errorf("event %+v, distances %+v", r.Event, r.Distances)
	}
}
