package query

import (
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/geodesy"
)

// meridianRecords are of stations 0.1°, 0.2° and 1° north of 40° N, 20° E, of the latest
// event, one there of an older one, and one of no known place.
func meridianRecords() []inventedRecord {
	return []inventedRecord{
		{code: "N1", siting: "free-field", event: quakeA, station: stationAt("P", 40.1), components: pair(0.02, 0.02)},
		{code: "N2", siting: "free-field", event: quakeA, station: stationAt("Q", 40.2), components: pair(0.01, 0.01)},
		{code: "N3", siting: "free-field", event: quakeA, station: stationAt("R", 41), components: pair(0.64, 0.64)},
		{code: "N4", siting: "free-field", event: quakeB, station: stationAt("S", 40), components: pair(9, 9)},
		{code: "N6", siting: "free-field", event: quakeA, station: stationAt("P", 40.1), components: pair(5, 5)}, // a second instrument
		{code: "N5", siting: "free-field", event: quakeA, station: &db.Station{Network: "ZX", Code: "T"}, components: pair(9, 9)},
	}
}

const placedStructures = "id,period_s,damping,mass_kg,latitude,longitude,max_displacement_m\n" +
	"near,1.5707963267948966,2%,1000,40,20,0.1\nbeside,1.5707963267948966,2%,1000,41,20,1\nnowhere,1,2%,,,,\nfree,1.5707963267948966,2%,,40,20,\n"

func askNearest(t *testing.T, q NearestQuestion) *NearestAnswer {
	t.Helper()
	q.Structures = readPortfolio(t, "p.csv", placedStructures)
	q.Scope.Event = EventLatest
	a, err := q.Ask(t.Context(), newStore(t, handGrid, meridianRecords()))
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// Twice as far weighs a quarter: ln SD is (4·ln 0.02 + ln 0.01)/5 but for the ellipsoid,
// on which 0.2° are twice 0.1° within 1e-5. Beside a station it is that one's, as if it
// were 1 km away, next to another 89 km away.
func TestNearestByHand(t *testing.T) {
	a := askNearest(t, NearestQuestion{Stations: 2})
	if len(a.Rows) != 3 || a.Rows[0].Structure.ID != "beside" || a.Rows[1].Structure.ID != "near" || a.Rows[2].Structure.ID != "free" {
		t.Fatalf("rows %+v", a.Rows)
	}
	near := a.Rows[1]
	want := math.Exp((4*math.Log(0.02) + math.Log(0.01)) / 5)
	if math.Abs(near.estimate("sd_m")/want-1) > 1e-4 || math.Abs(near.estimate("base_shear_n")/(16000*want)-1) > 1e-4 || math.Abs(near.Ratio/(10*want)-1) > 1e-4 || near.Limit != "displacement" {
		t.Errorf("%+v, want %v", near, want)
	}
	line, err := geodesy.Inverse(40, 20, 40.1, 20)
	if s := near.Stations; err != nil || len(s) != 2 || s[0].Record != "N1" || !near2(s[0].DistanceKM, line.LengthM/1000) || math.Abs(s[0].Weight-0.8) > 1e-4 || s[0].SDM != 0.02 {
		t.Errorf("stations %+v", s)
	}
	beside := a.Rows[0].Stations
	if len(beside) != 2 || beside[0].DistanceKM != 0 || beside[1].Station != "ZX.Q" || !(beside[0].Weight > 0.9998) {
		t.Errorf("beside a station: %+v", beside)
	}
	if text := a.Remarks(); !strings.Contains(text, "1 motion of stations of unknown position") || !strings.Contains(text, "1 structure without latitude and longitude") {
		t.Errorf("remarks %s", text)
	}
}

func near2(got, want float64) bool { return math.Abs(got-want) <= 1e-9*math.Abs(want) }

// Of many stations those found by chords first are the nearest of all by lines.
func TestNearestOfMany(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	sites := make([]site, 400)
	for i := range sites {
		s := site{motion: i, station: strconv.Itoa(i), latitudeDeg: 60 + 4*rng.Float64(), longitudeDeg: 178 + 5*rng.Float64()} // over the date line
		s.x, s.y, s.z = onSphere(s.latitudeDeg, s.longitudeDeg)
		sites[i] = s
	}
	for range 200 {
		latitude, longitude := 60+4*rng.Float64(), 178+5*rng.Float64()-360
		got := nearest(latitude, longitude, sites, 5, func(motion int) bool { return motion%3 > 0 })
		if len(got) != 5 {
			t.Fatalf("%d stations", len(got))
		}
		closer := 0
		for i := range sites {
			line, err := geodesy.Inverse(latitude, longitude, sites[i].latitudeDeg, sites[i].longitudeDeg)
			if err != nil {
				t.Fatal(err)
			}
			if i%3 > 0 && line.LengthM/1000 < got[4].km {
				closer++
			}
		}
		if closer != 4 {
			t.Fatalf("%d sites are closer than the fifth", closer)
		}
	}
}

func TestNearestMistakes(t *testing.T) {
	store := newStore(t, handGrid, meridianRecords())
	placed := readPortfolio(t, "p.csv", placedStructures)
	latest := Selection{Scope: Scope{Event: EventLatest}}
	for _, q := range []NearestQuestion{
		{PortfolioQuestion{Structures: placed}, 2},
		{PortfolioQuestion{Selection: latest, Structures: placed}, 0},
		{PortfolioQuestion{Selection: latest, Structures: placed[2:3]}, 2},
		{PortfolioQuestion{Selection: latest, Structures: placed, Extras: Extras{Spread: true}}, 2},
		{PortfolioQuestion{Selection: Selection{Component: ComponentEach, Scope: Scope{Event: EventLatest}}, Structures: placed}, 2},
	} {
		if a, err := q.Ask(t.Context(), store); !isUsage(err) || a != nil {
			t.Errorf("%+v: %v", q, err)
		}
	}
	q := NearestQuestion{PortfolioQuestion{Selection: Selection{Scope: Scope{Event: "QX"}}, Structures: placed}, 2}
	if _, err := q.Ask(t.Context(), store); !errors.As(err, new(*EmptyError)) {
		t.Errorf("an unknown event: %v", err)
	}
}

func TestNearestIsWritten(t *testing.T) {
	a := askNearest(t, NearestQuestion{Stations: 1})
	rows, err := csv.NewReader(strings.NewReader(written(t, a, FormatCSV, UnitsSI))).ReadAll()
	if err != nil || len(rows) != 4 || rows[1][0] != "beside" || strings.Join(rows[1][len(rows[1])-4:], ";") != "ZX.R;0;1;N3" {
		t.Errorf("CSV %v, %v", rows, err)
	}
	var got struct {
		Structures []struct {
			ID        string
			Ratio     *float64
			Estimates map[string]*float64
			Stations  []struct {
				DistanceKM *float64 `json:"distance_km"`
				Weight     float64
			}
		}
	}
	if err := json.Unmarshal([]byte(written(t, a, FormatJSON, UnitsSI)), &got); err != nil {
		t.Fatal(err)
	}
	if s := got.Structures; len(s) != 3 || *s[0].Ratio != 0.64 || *s[0].Estimates["sd_m"] != 0.64 || *s[0].Stations[0].DistanceKM != 0 || s[0].Stations[0].Weight != 1 || s[2].Ratio != nil {
		t.Errorf("JSON %+v", got)
	}
	if table := written(t, a, FormatTable, UnitsSI); !strings.Contains(table, "Demand on 3 structures from the nearest stations") || !strings.Contains(table, "ZX.R 0 km") {
		t.Errorf("table\n%s", table)
	}
}
