package query

import (
	"context"
	"math"
	"runtime"
	"slices"

	"swaybook/query/stats"
)

// Reduction is the statistics of one quantity over the motions of a selection,
// in the quantity's unit; LogStd has none. Motions whose usable band does not reach the
// period do not count. Where motions are balanced, all but Count, Min and Max are weighted.
// What is undefined is NaN: everything of no motion, percentiles that the sample does not
// support (stats.Supports), LogStd of one, LogMean and LogStd where a value is zero.
type Reduction struct {
	Count       int
	Effective   float64 // number of equally weighted motions that say as much; Count where none are balanced
	Mean        float64
	LogMean     float64   // geometric mean
	LogStd      float64   // standard deviation of ln, divisor Count-1
	Percentiles []float64 // in the order of the question
	Min, Max    float64   // the envelope
	// Governing is the record that gives Max, the first in order of code where
	// several do, and GoverningComponent its component.
	Governing          string
	GoverningComponent string
}

// DefaultPercentiles are the median and one standard deviation to each side of
// a normal distribution, rounded.
func DefaultPercentiles() []float64 { return []float64{16, 50, 84} }

// sample is the motions that a reduction is over, by position.
type sample struct {
	motions  []motion
	clusters []int // what is balanced, by position in motions; nil: nothing
	at       []int
}

// sample is all motions.
func (p *picked) sample() sample {
	return sample{p.motions, p.report.Balance.clusters(p.motions), upTo(len(p.motions))}
}

// of is the sample's motions of a group of them all.
func (s sample) of(g *Group) sample {
	s.at = g.motions
	return s
}

// reducer reduces samples one after another in the same space. It is for one
// goroutine.
type reducer struct {
	sample
	percents                        []float64
	known, weights, sorted, scratch []float64
}

func newReducer(s sample, percents []float64) *reducer {
	n := len(s.at)
	r := &reducer{sample: s, percents: percents, known: make([]float64, 0, n), sorted: make([]float64, n), scratch: make([]float64, n)}
	if s.clusters != nil {
		r.weights = make([]float64, n)
	}
	return r
}

// reduce takes one value a motion of the sample, in its order, NaN for those that have none.
// Sums are of the sorted values, so that they are the same in every digit whatever the
// order in which the files were read.
func (r *reducer) reduce(values []float64) Reduction {
	nan := math.NaN()
	out := Reduction{Mean: nan, LogMean: nan, LogStd: nan, Min: nan, Max: nan}
	if r.clusters != nil {
		r.reduceWeighted(&out, values)
	} else {
		r.reduceEqual(&out, values)
	}
	for i, percent := range r.percents {
		if !stats.Supports(out.Effective, percent) {
			out.Percentiles[i] = nan
		}
	}
	if governing := slices.Index(values, out.Max); governing >= 0 {
		m := &r.motions[r.at[governing]]
		out.Governing, out.GoverningComponent = m.record(), m.role
	}
	return out
}

func (r *reducer) reduceEqual(out *Reduction, values []float64) {
	known := r.known[:0]
	for _, x := range values {
		if !math.IsNaN(x) {
			known = append(known, x)
		}
	}
	n := len(known)
	out.Count, out.Effective = n, float64(n)
	sorted, scratch := r.sorted[:n], r.scratch[:n]
	copy(sorted, known)
	stats.Sort(sorted, scratch)
	out.Percentiles = stats.Percentiles(nil, sorted, r.percents)
	if n > 0 {
		out.Min, out.Max = sorted[0], sorted[n-1]
		out.Mean = stats.Mean(sorted)
		out.LogMean, out.LogStd = stats.LogMoments(scratch, sorted)
	}
}

func (r *reducer) reduceWeighted(out *Reduction, values []float64) {
	r.weigh(r.weights, values)
	sorted, n := r.sorted[:0], 0
	for k, x := range values {
		if !math.IsNaN(x) {
			sorted, r.weights[n] = append(sorted, x), r.weights[k]
			n++
		}
	}
	weights, scratch := r.weights[:n], r.scratch[:n]
	stats.SortWeighted(sorted, weights)
	out.Count, out.Effective = n, stats.EffectiveNumber(weights)
	out.Percentiles = stats.WeightedPercentiles(nil, scratch, sorted, weights, r.percents)
	if n > 0 {
		out.Min, out.Max = sorted[0], sorted[n-1]
		out.Mean = stats.WeightedMean(sorted, weights)
		out.LogMean, out.LogStd = stats.WeightedLogMoments(scratch, sorted, weights)
	}
}

// reduceAll reduces a measure at every period, from several goroutines.
func reduceAll(ctx context.Context, o *ordinates, s sample, measure Measure, percents []float64) ([]Reduction, error) {
	out := make([]Reduction, len(o.periodsS))
	workers := min(runtime.GOMAXPROCS(0), len(out))
	err := inParallel(ctx, workers, func(ctx context.Context, first int) error {
		r := newReducer(s, percents)
		values := make([]float64, len(s.at))
		for p := first; p < len(out) && ctx.Err() == nil; p += workers {
			omega, sd := omega(o.periodsS[p]), o.at(p)
			for k, i := range s.at {
				values[k] = measure.of(sd[i], omega)
			}
			out[p] = r.reduce(values)
		}
		return ctx.Err()
	})
	return out, err
}

// isDefined reports whether a figure can be printed.
func isDefined(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
