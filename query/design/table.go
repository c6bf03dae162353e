package design

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"

	"swaybook/query/stats"
)

// table is a spectrum by its points: periods ascend, the first may be 0, all
// values are positive.
type table struct {
	periods, values []float64 // s, PSA in g
}

func (p table) bandS() (from, to float64) { return p.periods[0], p.periods[len(p.periods)-1] }

// psaG interpolates: in the logarithms of both, in both themselves behind a
// point at 0. What lies between two points is not outside their values.
func (p table) psaG(t, eta float64) float64 {
	j, isPoint := slices.BinarySearch(p.periods, t)
	if isPoint {
		return eta * p.values[j]
	}
	t0, t1, v0, v1 := p.periods[j-1], p.periods[j], p.values[j-1], p.values[j]
	if t0 == 0 {
		return eta * between(v0+float64(t/t1*(v1-v0)), v0, v1)
	}
	share := stats.Log(t/t0) / stats.Log(t1/t0)
	return eta * between(v0*stats.Exp(share*stats.Log(v1/v0)), v0, v1)
}

// between takes off what rounding adds.
func between(x, a, b float64) float64 { return min(max(x, min(a, b)), max(a, b)) }

// readTable sets the spectrum to what the file that k names holds.
func (s *Spectrum) readTable(k *keys, open reader) {
	k.only("name", "kind", "file", "damping", "period_unit", "value_unit", "eta")
	if !k.has("damping") {
		k.fail("damping", "is missing: the damping ratio that the table is for")
	}
	s.damping = k.ratio("damping")
	units := stated{unitAt(k, "period_unit", periodUnits), unitAt(k, "value_unit", valueUnits)}
	name := k.text("file")
	if k.document.err != nil {
		return
	}
	path := filepath.FromSlash(name)
	if !filepath.IsAbs(path) {
		path = filepath.Join(filepath.Dir(k.document.path), path)
	}
	text, err := open(path, maxTable)
	if err != nil {
		k.fail("file", "%s: %w", path, err)
		return
	}
	points, mistake := readPoints(path, text, units)
	if mistake != nil {
		k.document.err = mistake
		return
	}
	s.shape = points
	from, to := points.bandS()
	s.words = fmt.Sprintf("table %s of %d points from %s to %s s, at %s damping", printable(filepath.Base(name)), len(points.periods), figure(from), figure(to), percent(s.damping))
	s.scaleByEta(k)
}

// unitAt returns the unit at key, nil where there is none.
func unitAt(k *keys, key string, known []unit) *unit {
	if !k.has(key) {
		return nil
	}
	text := k.text(key)
	u := lookUp(text, known)
	if u == nil && text != "" {
		k.fail(key, "want %s, found %s", listed(names(known)), found(text))
	}
	return u
}

// unit is one of a table's units. Of a period, per of them are a second; a
// value divided by per and times (2π/T)^power is PSA in g, T in s.
type unit struct {
	name  string
	per   float64
	power int
}

var periodUnits = []unit{{"s", 1, 0}, {"ms", 1000, 0}}

// valueUnits are those of PSA, PSV and SD.
var valueUnits = []unit{
	{"g", 1, 0}, {"m/s2", standardGravity, 0}, {"cm/s2", 100 * standardGravity, 0},
	{"m/s", standardGravity, 1}, {"cm/s", 100 * standardGravity, 1},
	{"m", standardGravity, 2}, {"cm", 100 * standardGravity, 2}, {"mm", 1000 * standardGravity, 2},
}

func names(units []unit) []string {
	out := make([]string, len(units))
	for i, u := range units {
		out[i] = u.name
	}
	return out
}

// psaG returns PSA in g of a value at a period in s.
func (u unit) psaG(value, periodS float64) float64 {
	psa := value / u.per
	for range u.power {
		psa *= 2 * math.Pi / periodS
	}
	return psa
}
