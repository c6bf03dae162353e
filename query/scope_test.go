package query

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"swaybook/db"
)

// stationAt is on the meridian of 20° E.
func stationAt(code string, latitude float64) *db.Station {
	return &db.Station{Network: "ZX", Code: code, LatitudeDeg: &latitude, LongitudeDeg: ptr(20.0)}
}

// scopeRecords are of stations along a meridian and of events of known and unknown times.
func scopeRecords() []inventedRecord {
	nowhere := &db.Station{Network: "ZX", Code: "NOWHERE"}
	return []inventedRecord{
		{code: "S1", siting: "free-field", event: quakeB, station: stationAt("P", 40), components: pair(0.01, 0.01)},
		{code: "S2", siting: "free-field", event: quakeA, station: stationAt("Q", 40.1), components: pair(0.02, 0.02)},
		{code: "S3", siting: "free-field", event: quakeA, station: stationAt("R", 41), components: pair(0.03, 0.03)},
		{code: "S4", siting: "free-field", event: quakeA, station: nowhere, components: pair(0.04, 0.04)},
		{code: "S5", siting: "free-field", event: quakeC, station: stationAt("T", 40), components: pair(0.05, 0.05)},
		{code: "S6", siting: "free-field", event: quakeC, station: stationAt("U", 40), start: time.Date(2021, 6, 1, 0, 0, 0, 0, time.UTC), components: pair(0.06, 0.06)},
	}
}

func taken(t *testing.T, store *db.Store, scope Scope) (codes, report string, err error) {
	t.Helper()
	answer, err := RecordsQuestion{Selection{Scope: scope, Component: ComponentH1}}.Ask(t.Context(), store)
	if err != nil {
		return "", "", err
	}
	var list []string
	for _, r := range answer.Rows {
		list = append(list, r.Record)
	}
	return strings.Join(list, " "), answer.Selection.Remarks(), nil
}

func date(t *testing.T, parse func(string) (time.Time, error), text string) time.Time {
	t.Helper()
	at, err := parse(text)
	if err != nil {
		t.Fatal(err)
	}
	return at
}

// One degree of latitude at 40° is 111.04 km on WGS 84 (from memory; the meridian's radius
// of curvature times π/180), so that 0.1° is within 11.2 and beyond 11.0 km.
func TestScopeTakesByPlaceTimeAndEvent(t *testing.T) {
	store := newStore(t, handGrid, scopeRecords())
	near := func(km float64) *Near { return &Near{40, 20, km} }
	since := func(text string) time.Time { return date(t, ParseSince, text) }
	until := func(text string) time.Time { return date(t, ParseUntil, text) }
	for _, c := range []struct {
		scope         Scope
		codes, report string
	}{
		{Scope{}, "S1 S2 S3 S4 S5 S6", ""},
		{Scope{Near: near(11.0)}, "S1 S5 S6", "left out: 1 record: station position unknown\n"},
		{Scope{Near: near(11.2)}, "S1 S2 S5 S6", "left out: 1 record: station position unknown\n"},
		{Scope{Since: since("2020")}, "S2 S3 S4 S6", "left out: 1 record: event time unknown\n"},
		{Scope{Until: until("2019")}, "S1", "left out: 1 record: event time unknown\n"},
		{Scope{Until: until("2019-12-30")}, "", "left out: 1 record: event time unknown\n"},
		{Scope{Since: since("2019-12-31T23:59:59"), Until: until("2021-06-01")}, "S1 S6", "left out: 1 record: event time unknown\n"},
		{Scope{Event: "QB"}, "S1", ""},
		{Scope{Event: EventLatest}, "S2 S3 S4", ""},
		{Scope{Event: EventLatest, Until: until("2023")}, "S1", "left out: 1 record: event time unknown\n"},
		{Scope{Event: EventLatest, Near: near(1)}, "S1", ""},
	} {
		codes, report, err := taken(t, store, c.scope)
		if empty, ok := errors.AsType[*EmptyError](err); ok {
			err = nil
			for _, l := range empty.LeftOut {
				report += "left out: " + countOf(l.Records, "record", "records") + ": " + l.Reason + "\n"
			}
		}
		// Of the latest event nothing is left out but what is its own.
		if err != nil || codes != c.codes || c.scope.Event == "" && report != c.report {
			t.Errorf("%+v took %q, %q, %v; want %q, %q", c.scope, codes, report, err, c.codes, c.report)
		}
	}
}

func TestScopeThatTakesNothing(t *testing.T) {
	store := newStore(t, handGrid, scopeRecords())
	for _, c := range []struct {
		scope Scope
		want  string
	}{
		{Scope{Event: "QX"}, "6 records are outside the place, time or event"},
		{Scope{Event: EventLatest, Near: &Near{-40, 20, 10}}, "5 records are outside the place, time or event"},
	} {
		_, err := SpectrumQuestion{Selection: Selection{Scope: c.scope}, Damping: 0.05}.Ask(t.Context(), store)
		if empty, ok := errors.AsType[*EmptyError](err); !ok || !strings.Contains(empty.Error(), c.want) {
			t.Errorf("%+v: %v, want %q", c.scope, err, c.want)
		}
	}
}

// The latest event is that of what everything else takes.
func TestLatestOfTheSelection(t *testing.T) {
	store := newStore(t, handGrid, scopeRecords())
	a := askSpectrum(t, store, SpectrumQuestion{Selection: Selection{Where: "magnitude < 6", Scope: Scope{Event: EventLatest}}, Damping: 0.05})
	if a.Selection.Scope.Event != "QB" || a.Selection.Records != 1 {
		t.Errorf("%+v", a.Selection)
	}
	_, err := SpectrumQuestion{Selection: Selection{Where: `event == "QC"`, Scope: Scope{Event: EventLatest}}, Damping: 0.05}.Ask(t.Context(), store)
	if empty, ok := errors.AsType[*EmptyError](err); !ok || !strings.Contains(empty.Error(), "of no motion that is selected the time of the event is known") {
		t.Errorf("of no known time: %v", err)
	}
}

func TestScopeInWords(t *testing.T) {
	store := newStore(t, handGrid, scopeRecords())
	scope := Scope{Near: &Near{40, 20, 200}, Since: date(t, ParseSince, "2020-02"), Event: EventLatest}
	answer, err := SpectrumQuestion{Selection: Selection{Scope: scope}, Damping: 0.05}.Ask(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	const want = "; stations within 200 km of 40, 20; since 2020-02-01T00:00:00Z; event QA"
	if !strings.Contains(answer.Selection.heading(), want) {
		t.Errorf("heading %q lacks %q", answer.Selection.heading(), want)
	}
	text, err := jsonText(answer.Selection.object())
	if err != nil || !strings.Contains(string(text), `"near": {"latitude": 40, "longitude": 20, "km": 200}`) ||
		!strings.Contains(string(text), `"since": "2020-02-01T00:00:00Z"`) || strings.Contains(string(text), `"before"`) || !strings.Contains(string(text), `"event": "QA"`) {
		t.Errorf("JSON %s, %v", text, err)
	}
}

func TestParseScope(t *testing.T) {
	if n, err := ParseNear(" -38.5, 176 ,50"); err != nil || *n != (Near{-38.5, 176, 50}) {
		t.Errorf("ParseNear: %v, %v", n, err)
	}
	for _, bad := range []string{"1,2", "1,2,3,4", "91,0,1", "0,361,1", "0,0,0", "0,0,-1", "a,0,1", "0,0,NaN", "NaN,0,1", "0,0,Inf"} {
		if n, err := ParseNear(bad); !isUsage(err) {
			t.Errorf("ParseNear(%q) = %v, %v", bad, n, err)
		}
	}
	for _, bad := range []string{"19", "2019-13", "2019-02-30", "yesterday", "2019-01-01 25:00"} {
		if at, err := ParseSince(bad); !isUsage(err) {
			t.Errorf("ParseSince(%q) = %v, %v", bad, at, err)
		}
	}
	if at := date(t, ParseUntil, "2020-02"); !at.Equal(time.Date(2020, 3, 1, 0, 0, 0, 0, time.UTC)) {
		t.Errorf("the end of February 2020 is %v", at)
	}
	if at := date(t, ParseSince, "2020-02-03T04:05:06+09:00"); !at.Equal(time.Date(2020, 2, 2, 19, 5, 6, 0, time.UTC)) {
		t.Errorf("a time with a zone is %v", at)
	}
	if err := (&Scope{Since: date(t, ParseSince, "2021"), Until: date(t, ParseUntil, "2020")}).validate(); !isUsage(err) {
		t.Errorf("a scope that ends before it begins: %v", err)
	}
	if err := (&Scope{Near: &Near{RadiusKM: math.Inf(1)}}).validate(); !isUsage(err) {
		t.Errorf("an infinite distance: %v", err)
	}
}

func isUsage(err error) bool {
	_, ok := errors.AsType[*UsageError](err)
	return ok
}
