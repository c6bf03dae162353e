package query

import (
	"fmt"
	"io"
	"math"
	"strings"
)

// Write renders the answer as a table, or as CSV or JSON, which are in SI whatever the
// units. The error is a UsageError for another format and otherwise one of w.
func (a *NearestAnswer) Write(w io.Writer, format Format, units Units) error {
	return answer{"demands", func() []byte { return a.table(units) }, a.csv, a.object}.write(w, format)
}

// Remarks returns what PortfolioAnswer.Remarks does.
func (a *NearestAnswer) Remarks() string { return a.Error.remark() + remarks(&a.Selection) }

// rows is the table of the answer.
func (a *NearestAnswer) rows(units Units) table {
	t := table{columns: []column{{name: "structure", isWord: true}, {name: "period", unit: "s"}, {name: "damping"}}}
	for _, c := range columnsOfPortfolio {
		name, _ := quantityUnits[c.name].in(units)
		t.columns = append(t.columns, column{name: c.title, unit: name})
	}
	t.columns = append(t.columns, column{name: "ratio"}, column{name: "limit", isWord: true}, column{name: "nearest", unit: "km"}, column{name: "stations", isWord: true})
	for i := range a.Rows {
		t.add(a.Rows[i].cells(units)...)
	}
	return t
}

func (a *NearestAnswer) title() string {
	return fmt.Sprintf("Demand on %s from the nearest stations, %s ordinates", countOf(len(a.Rows), "structure", "structures"), a.Ordinates)
}

func (a *NearestAnswer) table(units Units) []byte {
	t := a.rows(units)
	text := fmt.Appendf(nil, "%s\n%s\n%s\n", a.title(), a.Selection.heading(), a.Selection.methodLine())
	return append(append(t.appendTo(text), '\n'), a.Remarks()...)
}

func (r *NearestRow) cells(units Units) []string {
	s := r.Structure
	cells := []string{s.ID, figure(s.PeriodS), percentText(s.Damping)}
	for _, c := range columnsOfPortfolio {
		_, per := quantityUnits[c.name].in(units)
		cells = append(cells, figure(r.estimate(c.name)/per))
	}
	limit, km := r.Limit, math.NaN()
	if limit == "" {
		limit = "-"
	}
	if len(r.Stations) > 0 {
		km = r.Stations[0].DistanceKM
	}
	return append(cells, figure(r.Ratio), limit, figure(km), r.stationWords())
}

// stationWords name the stations and their distances.
func (r *NearestRow) stationWords() string {
	parts := make([]string, len(r.Stations))
	for i, s := range r.Stations {
		parts[i] = fmt.Sprintf("%s %s km", s.Station, figure(s.DistanceKM))
	}
	return strings.Join(parts, ", ")
}

// estimate is that of a quantity, NaN where there is none.
func (r *NearestRow) estimate(name string) float64 {
	for _, e := range r.Estimates {
		if e.Name == name {
			return e.Value
		}
	}
	return math.NaN()
}

// csv has a row a structure; stations, distances, weights and records stand in cells of
// their own, each a list split by blanks, the nearest first.
func (a *NearestAnswer) csv() []byte {
	var l csvLine
	l.words("id", "name", "period_s", "damping", "latitude", "longitude")
	l.words(portfolioQuantities...)
	l.words("ratio", "governing_limit", "nearest_km", "farthest_km", "stations", "distances_km", "weights", "records")
	l.end()
	for i := range a.Rows {
		r := &a.Rows[i]
		s := r.Structure
		l.words(s.ID, s.Name)
		for _, x := range []float64{s.PeriodS, s.Damping, orNaN(s.LatitudeDeg), orNaN(s.LongitudeDeg)} {
			l.number(x)
		}
		for _, name := range portfolioQuantities {
			l.number(r.estimate(name))
		}
		l.number(r.Ratio)
		l.word(r.Limit)
		near, far := math.NaN(), math.NaN()
		if n := len(r.Stations); n > 0 {
			near, far = r.Stations[0].DistanceKM, r.Stations[n-1].DistanceKM
		}
		l.number(near)
		l.number(far)
		list := func(of func(s *StationAt) string) {
			parts := make([]string, len(r.Stations))
			for k := range r.Stations {
				parts[k] = of(&r.Stations[k])
			}
			l.word(strings.Join(parts, " "))
		}
		list(func(s *StationAt) string { return s.Station })
		list(func(s *StationAt) string { return shortest(s.DistanceKM) })
		list(func(s *StationAt) string { return shortest(s.Weight) })
		list(func(s *StationAt) string { return s.Record })
		l.end()
	}
	return l.text
}

func (a *NearestAnswer) object() object {
	rows := make([]object, len(a.Rows))
	for i := range a.Rows {
		rows[i] = a.Rows[i].object()
	}
	return object{
		{"selection", a.Selection.object()}, {"ordinates", string(a.Ordinates)}, {"interpolation_error", a.Error.object()},
		{"structures", rows}, {"caution", Caution},
	}
}

func (r *NearestRow) object() object {
	s := r.Structure
	estimates, stations := object{}, make([]object, len(r.Stations))
	for _, e := range r.Estimates {
		estimates = append(estimates, field{e.Name, e.Value})
	}
	for i, at := range r.Stations {
		stations[i] = object{{"record", at.Record}, {"station", at.Station}, {"distance_km", at.DistanceKM}, {"weight", at.Weight}, {"sd_m", at.SDM}}
	}
	o := object{
		{"id", s.ID}, {"name", s.Name}, {"period_s", s.PeriodS}, {"damping", s.Damping}, {"latitude", orNaN(s.LatitudeDeg)}, {"longitude", orNaN(s.LongitudeDeg)},
		{"estimates", estimates}, {"ratio", r.Ratio}, {"governing_limit", nil}, {"stations", stations},
	}
	if r.Limit != "" {
		o[8].value = r.Limit
	}
	return o
}
