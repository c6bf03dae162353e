package query

import (
	"errors"
	"math"
	"sort"

	"swaybook/query/design"
	"swaybook/query/stats"
)

// ReadDesign reads a design spectrum; see package design for the files. The error is a
// UsageError that names file, line and key.
func ReadDesign(path string) (*design.Spectrum, error) {
	if path == "" {
		return nil, nil
	}
	s, err := design.Read(path)
	if at, ok := errors.AsType[*design.FileError](err); ok {
		return nil, &UsageError{What: "design", Why: at.Error(), Err: err}
	}
	return &s, err
}

// designSD is the SD in m of the design spectrum at a period in s, NaN where it has none.
// Where it is for one damping only, that one is taken.
func designSD(s *design.Spectrum, periodS, damping float64) float64 {
	if s == nil {
		return math.NaN()
	}
	if ratio, fixed := s.Damping(); fixed {
		damping = ratio
	}
	w := omega(periodS)
	return s.PSAg(periodS, damping) * StandardGravity / w / w
}

// against is how a sample lies beside the design spectrum.
type against struct {
	value float64 // of the design spectrum, in the quantity's unit
	// median and p84 are the sample's percentiles over value, NaN where not supported.
	median, p84 float64
	above       float64 // share of the sample's weight that is above value
}

// against compares the values last reduced.
func (r *reducer) against(out *Reduction, value float64) *against {
	a := &against{value: value, median: math.NaN(), p84: math.NaN(), above: math.NaN()}
	if !isDefined(value) || len(r.reduced) == 0 {
		return a
	}
	percents := []float64{50, 84}
	found := r.percentiles(percents)
	for i, into := range []*float64{&a.median, &a.p84} {
		if stats.Supports(out.Effective, percents[i]) {
			*into = found[i] / value
		}
	}
	a.above = r.above(value)
	return a
}

// above is the share of the weight of the motions last reduced whose value is above this.
func (r *reducer) above(value float64) float64 {
	if r.reducedWeights == nil {
		return float64(len(r.reduced)-atMost(r.reduced, value)) / float64(len(r.reduced))
	}
	var total, above float64
	for i, x := range r.reduced {
		total += r.reducedWeights[i]
		if x > value {
			above += r.reducedWeights[i]
		}
	}
	return above / total
}

// atMost counts the values of an ascending list up to x.
func atMost(sorted []float64, x float64) int {
	return sort.Search(len(sorted), func(i int) bool { return sorted[i] > x })
}

func designStatistics() []statistic {
	of := func(part func(*against) float64) func(*Reduction) float64 {
		return ofExtra(func(e *extraFigures) *against { return e.against }, part)
	}
	return []statistic{
		{title: "design", csv: "design", path: []string{"design", "value"}, hasUnit: true, of: of(func(a *against) float64 { return a.value })},
		{title: "p50/design", csv: "p50_over_design", path: []string{"design", "median_ratio"}, of: of(func(a *against) float64 { return a.median })},
		{title: "p84/design", csv: "p84_over_design", path: []string{"design", "p84_ratio"}, of: of(func(a *against) float64 { return a.p84 })},
		{title: "above", csv: "share_above_design", path: []string{"design", "share_above"}, of: of(func(a *against) float64 { return a.above }), text: percentTitle},
	}
}
