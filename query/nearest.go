package query

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/geodesy"
	"swaybook/query/stats"
)

// NearestQuestion asks what the stations nearest to each structure recorded of one event
// say about it: the order in which to inspect them. Its PortfolioQuestion has an event.
type NearestQuestion struct {
	PortfolioQuestion
	Stations int // how many of the nearest, at least 1
}

// NearestAnswer has a row a structure of known place, the greatest ratio to a capacity
// first, those without ratio last, in the order of the question.
type NearestAnswer struct {
	Selection SelectionReport
	Ordinates Source
	Error     *GridError // of interpolation, nil of exact ordinates
	Rows      []NearestRow
}

// NearestRow is the estimate for one structure.
type NearestRow struct {
	Structure *PortfolioStructure
	Estimates []Estimate // over the band where the period is uncertain
	Stations  []StationAt
	Ratio     float64 // the greatest estimate over a capacity, NaN for none
	Limit     string  // which one: displacement, drift or base_shear
}

// Estimate is one quantity at the structure's place, in the unit of its name.
type Estimate struct {
	Name  string
	Value float64
}

// StationAt is a recording that an estimate rests on.
type StationAt struct {
	Record, Station string  // the station with its network, NET.STA
	DistanceKM      float64 // from the structure, along the ellipsoid
	Weight          float64 // share of the estimate
	SDM             float64 // SD in m of the structure there
}

// farKM is how far the nearest station is at most, without a note: our limit.
const farKM = 100

// leastDistanceKM bounds weights: nearer stations differ by more than distance tells.
const leastDistanceKM = 1

// Ask answers the question; see PortfolioQuestion.Ask for the errors. Estimates are
//
//	ln y = Σ w·ln y[i] / Σ w,  w = 1/d²,
//
// of the nearest stations at distances d, at least 1 km: inverse distance weighting of
// logarithms. Of a station with several motions, such as ground and roof, the first by record
// counts; motions of stations without position do not.
//
// Source: D. Shepard, "A two-dimensional interpolation function for irregularly-spaced
// data", Proc. 23rd ACM National Conference, 1968, 517–524, with the power 2.
func (q NearestQuestion) Ask(ctx context.Context, store *db.Store) (*NearestAnswer, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	answer := &NearestAnswer{Ordinates: q.Ordinates}
	if err := view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error { return q.answer(ctx, snapshot, answer) }); err != nil {
		return nil, err
	}
	return answer, nil
}

func (q NearestQuestion) withDefaults() (NearestQuestion, error) {
	base, err := q.PortfolioQuestion.withDefaults()
	switch {
	case err != nil:
		return q, err
	case q.Scope.Event == "":
		return q, usage("nearest", "the nearest stations are of one event: give --event latest, or its code")
	case q.Stations < 1:
		return q, usage("nearest", "%d stations are none", q.Stations)
	case base.Extras.isAny():
		return q, usage("show", "an estimate from the nearest stations has no further figures, and no design spectrum")
	case base.Component == ComponentEach:
		return q, usage("component", "each is two motions a station; ask for one")
	case !slices.ContainsFunc(q.Structures, PortfolioStructure.hasPlace):
		return q, usage("structures", "none has a latitude and a longitude")
	}
	q.PortfolioQuestion = base
	return q, nil
}

func (s PortfolioStructure) hasPlace() bool { return s.LatitudeDeg != nil }

func (q *NearestQuestion) answer(ctx context.Context, snapshot *db.Snapshot, answer *NearestAnswer) error {
	placed := slices.DeleteFunc(slices.Clone(q.Structures), func(s PortfolioStructure) bool { return !s.hasPlace() })
	without := len(q.Structures) - len(placed)
	q.Structures = placed
	w, err := q.begin(ctx, snapshot, db.DetailRecord)
	if err != nil {
		return err
	}
	sites, unplaced := sitesOf(w.picked.motions)
	if len(sites) == 0 {
		return errors.New("of no station that recorded the event the position is known")
	}
	answer.Rows = make([]NearestRow, len(w.plans))
	err = w.run(ctx, func(ctx context.Context, o *ordinates, from, to int) error {
		return inParallel(ctx, to-from, func(_ context.Context, i int) error {
			answer.Rows[from+i] = w.plans[from+i].estimate(o, sites, q.Stations, w.picked.motions)
			return nil
		})
	})
	if err != nil {
		return err
	}
	slices.SortStableFunc(answer.Rows, func(a, b NearestRow) int { return cmp.Compare(b.sortRatio(), a.sortRatio()) })
	if answer.Error, err = w.end(ctx); err != nil {
		return err
	}
	far := 0
	for i := range answer.Rows {
		if s := answer.Rows[i].Stations; len(s) == 0 || s[0].DistanceKM > farKM {
			far++
		}
	}
	w.picked.report.Notes = append(w.picked.report.Notes, nearestMethod)
	if far > 0 {
		w.picked.report.Notes = append(w.picked.report.Notes, fmt.Sprintf("%s farther than %d km from any station: look at their coordinates", countOf(far, "structure is", "structures are"), farKM))
	}
	if unplaced > 0 {
		w.picked.report.Notes = append(w.picked.report.Notes, countOf(unplaced, "motion", "motions")+" of stations of unknown position not taken")
	}
	if without > 0 {
		w.picked.report.Notes = append(w.picked.report.Notes, countOf(without, "structure", "structures")+" without latitude and longitude not answered for")
	}
	answer.Selection = w.picked.report
	return nil
}

const nearestMethod = "estimates are means of logarithms over the nearest stations, weighted by 1/distance², from 1 km on; site, path and depth do not enter"

// sortRatio orders rows without ratio behind all others.
func (r *NearestRow) sortRatio() float64 {
	if math.IsNaN(r.Ratio) {
		return -1
	}
	return r.Ratio
}

// site is where a motion was recorded.
type site struct {
	motion                    int // position
	station                   string
	latitudeDeg, longitudeDeg float64
	x, y, z                   float64 // on the unit sphere
}

func sitesOf(motions []motion) (sites []site, unplaced int) {
	for i := range motions {
		s := motions[i].members[0].Record.Station
		if s == nil || s.LatitudeDeg == nil || s.LongitudeDeg == nil {
			unplaced++
			continue
		}
		at := site{motion: i, station: stationCode(s), latitudeDeg: *s.LatitudeDeg, longitudeDeg: *s.LongitudeDeg}
		at.x, at.y, at.z = onSphere(at.latitudeDeg, at.longitudeDeg)
		sites = append(sites, at)
	}
	return sites, unplaced
}

// stationCode is the station with its network: codes repeat between networks.
func stationCode(s *db.Station) string {
	if s.Network == "" {
		return s.Code
	}
	return s.Network + "." + s.Code
}

func onSphere(latitudeDeg, longitudeDeg float64) (x, y, z float64) {
	sin, cos := math.Sincos(latitudeDeg * math.Pi / 180)
	sinL, cosL := math.Sincos(longitudeDeg * math.Pi / 180)
	return cos * cosL, cos * sinL, sin
}

// candidate is a site and its distance.
type candidate struct {
	site  *site
	chord float64 // on the unit sphere
	km    float64
}

// nearest returns at most n of the sites that usable accepts, one a station, the nearest first, equal
// distances in the order of records. Chords on a sphere, which differ from lines on the
// ellipsoid by less than 1 %, leave few whose distance has to be found.
func nearest(latitudeDeg, longitudeDeg float64, sites []site, n int, usable func(motion int) bool) []candidate {
	const margin = 1.02
	x, y, z := onSphere(latitudeDeg, longitudeDeg)
	var list []candidate
	taken := map[string]bool{}
	for i := range sites {
		s := &sites[i]
		if !taken[s.station] && usable(s.motion) {
			taken[s.station] = true
			list = append(list, candidate{site: s, chord: math.Hypot(math.Hypot(s.x-x, s.y-y), s.z-z)})
		}
	}
	slices.SortFunc(list, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.chord, b.chord), cmp.Compare(a.site.motion, b.site.motion))
	})
	last := min(n, len(list)) - 1
	for last >= 0 && last+1 < len(list) && list[last+1].chord <= margin*list[min(n, len(list))-1].chord+1e-6 {
		last++
	}
	list = list[:last+1]
	for i := range list {
		s := list[i].site
		list[i].km = math.Inf(1) // of what is no place
		if line, err := geodesy.Inverse(latitudeDeg, longitudeDeg, s.latitudeDeg, s.longitudeDeg); err == nil {
			list[i].km = line.LengthM / 1000
		}
	}
	slices.SortStableFunc(list, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.km, b.km), cmp.Compare(a.site.motion, b.site.motion))
	})
	list = slices.DeleteFunc(list, func(c candidate) bool { return math.IsInf(c.km, 1) })
	return list[:min(n, len(list))]
}

// estimate answers for one structure.
func (p *plan) estimate(o *ordinates, sites []site, n int, motions []motion) NearestRow {
	s := p.structure
	row := NearestRow{Structure: s, Ratio: math.NaN()}
	taken := nearest(*s.LatitudeDeg, *s.LongitudeDeg, sites, n, func(motion int) bool {
		return !slices.ContainsFunc(p.at, func(position int) bool { return math.IsNaN(o.at(position)[motion]) })
	})
	at, weights := make([]int, len(taken)), make([]float64, len(taken))
	var total float64
	for i, c := range taken {
		d := max(c.km, leastDistanceKM)
		at[i], weights[i] = c.site.motion, 1/(d*d)
		total += weights[i]
	}
	for i, c := range taken {
		m := &motions[at[i]]
		row.Stations = append(row.Stations, StationAt{
			Record: m.record(), Station: c.site.station, DistanceKM: c.km, Weight: weights[i] / total, SDM: o.at(p.at[0])[at[i]],
		})
	}
	p.compared(o, at, nil, func(name string, values []float64, _ float64) {
		estimate, _ := stats.WeightedLogMoments(nil, values, weights)
		row.Estimates = append(row.Estimates, Estimate{name, estimate})
		for _, l := range s.limitsOf(name) {
			if ratio := estimate / l.inUnit; ratio > row.Ratio || math.IsNaN(row.Ratio) {
				row.Ratio, row.Limit = ratio, l.name
			}
		}
	})
	if math.IsNaN(row.Ratio) {
		row.Limit = ""
	}
	return row
}
