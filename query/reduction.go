package query

import (
	"context"
	"math"
	"slices"

	"swaybook/query/mixed"
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
	extra              extraFigures
}

// DefaultPercentiles are the median and one standard deviation to each side of
// a normal distribution, rounded.
func DefaultPercentiles() []float64 { return []float64{16, 50, 84} }

// sample is the motions that a reduction is over, by position.
type sample struct {
	motions  []motion
	clusters []int // what is balanced, by position in motions; nil: nothing
	events   []int // the same of events, where a figure needs them; see clustersByEvent
	at       []int
}

// sample is all motions, with what the figures need.
func (p *picked) sample(e Extras) sample {
	s := sample{motions: p.motions, clusters: p.report.Balance.clusters(p.motions), at: upTo(len(p.motions))}
	if e.Spread || !e.Bootstrap.isNone() {
		s.events = clustersByEvent(p.motions)
	}
	return s
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
	percents                 []float64
	extras                   Extras
	weights, sorted, scratch []float64
	ranks                    map[rankKey]ranks
	fitter                   mixed.Fitter
	reduced, reducedWeights  []float64 // the values last reduced, ascending, and their weights, nil for none
	logs                     []float64 // for the fit
	groups                   []int
}

func newReducer(s sample, percents []float64, extras Extras) *reducer {
	n := len(s.at)
	r := &reducer{sample: s, percents: percents, extras: extras, sorted: make([]float64, n), scratch: make([]float64, n), ranks: map[rankKey]ranks{}}
	if s.clusters != nil {
		r.weights = make([]float64, n)
	}
	return r
}

// reduce takes one value a motion of the sample, in its order, NaN for those that have none,
// and that of the design spectrum, NaN for none. Sums are of the sorted values, so that they
// are the same in every digit whatever the order in which the files were read.
func (r *reducer) reduce(values []float64, level float64) Reduction {
	nan := math.NaN()
	out := Reduction{Mean: nan, LogMean: nan, LogStd: nan, Min: nan, Max: nan}
	sorted, weights := r.sort(values)
	r.reduced, r.reducedWeights = sorted, weights
	n := len(sorted)
	scratch := r.scratch[:n]
	out.Count = n
	if n > 0 {
		out.Min, out.Max = sorted[0], sorted[n-1]
	}
	out.Percentiles = r.percentiles(r.percents)
	if weights == nil {
		out.Effective, out.Mean = float64(n), stats.Mean(sorted)
		out.LogMean, out.LogStd = stats.LogMoments(scratch, sorted)
	} else {
		out.Effective, out.Mean = stats.EffectiveNumber(weights), stats.WeightedMean(sorted, weights)
		out.LogMean, out.LogStd = stats.WeightedLogMoments(scratch, sorted, weights)
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
	if r.extras.isAny() {
		r.addExtras(&out, values, level)
	}
	return out
}

// sort returns the known values in ascending order, with their weights where motions are
// balanced, nil elsewhere.
func (r *reducer) sort(values []float64) (sorted, weights []float64) {
	if r.clusters != nil {
		r.weigh(r.weights, values)
	}
	sorted = r.sorted[:0]
	for k, x := range values {
		if math.IsNaN(x) {
			continue
		}
		if r.clusters != nil {
			r.weights[len(sorted)] = r.weights[k]
		}
		sorted = append(sorted, x)
	}
	if r.clusters == nil {
		stats.Sort(sorted, r.scratch[:len(sorted)])
		return sorted, nil
	}
	weights = r.weights[:len(sorted)]
	stats.SortWeighted(sorted, weights)
	return sorted, weights
}

// percentiles are those of the values last reduced.
func (r *reducer) percentiles(percents []float64) []float64 {
	if r.reducedWeights == nil {
		return stats.Percentiles(nil, r.reduced, percents)
	}
	return stats.WeightedPercentiles(nil, r.scratch[:len(r.reduced)], r.reduced, r.reducedWeights, percents)
}

func (r *reducer) addExtras(out *Reduction, values []float64, level float64) {
	if r.extras.Intervals {
		out.extra.intervals = r.intervals()
	}
	if r.extras.Lognormal {
		out.extra.lognormal = r.lognormal(out)
	}
	if r.extras.Spread {
		out.extra.spread = r.spread(values)
	}
	if !r.extras.Bootstrap.isNone() {
		out.extra.resampled = r.bootstrap(out, values)
	}
	if r.extras.Design != nil {
		out.extra.against = r.against(out, level)
	}
}

// reduceAll reduces the question's measure at every period, from several goroutines.
func (q SpectrumQuestion) reduceAll(ctx context.Context, o *ordinates, s sample) ([]Reduction, error) {
	out := make([]Reduction, len(o.oscillators))
	workers := min(maxWorkers(), len(out))
	err := inParallel(ctx, workers, func(ctx context.Context, first int) error {
		r := newReducer(s, q.Percentiles, q.Extras)
		values := make([]float64, len(s.at))
		for p := first; p < len(out) && ctx.Err() == nil; p += workers {
			periodS := o.oscillators[p].PeriodS
			omega, sd := omega(periodS), o.at(p)
			for k, i := range s.at {
				values[k] = q.Measure.of(sd[i], omega)
			}
			out[p] = r.reduce(values, q.Measure.of(designSD(q.Design, periodS, q.Damping), omega))
		}
		return ctx.Err()
	})
	return out, err
}

// isDefined reports whether a figure can be printed.
func isDefined(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
