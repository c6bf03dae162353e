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
// period do not count. What is undefined is NaN: everything of no motion, percentiles of
// fewer than three, LogStd of one, LogMean and LogStd where a value is zero.
type Reduction struct {
	Count       int
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
	motions []motion
	at      []int
}

// wholeSample is all motions.
func wholeSample(motions []motion) sample { return sample{motions, upTo(len(motions))} }

// reducer reduces samples one after another in the same space. It is for one
// goroutine.
type reducer struct {
	sample
	percents               []float64
	known, sorted, scratch []float64
}

func newReducer(s sample, percents []float64) *reducer {
	n := len(s.at)
	return &reducer{sample: s, percents: percents, known: make([]float64, 0, n), sorted: make([]float64, n), scratch: make([]float64, n)}
}

// leastForPercentiles is the number of spectra below which a percentile is not defined:
// of one or two it would be an opinion about how distributions look.
const leastForPercentiles = 3

// reduce takes one value a motion of the sample, in its order, NaN for those that have none.
// Sums are of the sorted values, so that they are the same in every digit whatever the
// order in which the files were read.
func (r *reducer) reduce(values []float64) Reduction {
	known := r.known[:0]
	for _, x := range values {
		if !math.IsNaN(x) {
			known = append(known, x)
		}
	}
	n := len(known)
	nan := math.NaN()
	if n == 0 {
		return Reduction{Mean: nan, LogMean: nan, LogStd: nan, Percentiles: slices.Repeat([]float64{nan}, len(r.percents)), Min: nan, Max: nan}
	}
	sorted, scratch := r.sorted[:n], r.scratch[:n]
	copy(sorted, known)
	stats.Sort(sorted, scratch)
	out := Reduction{Count: n, Mean: stats.Mean(sorted), Percentiles: stats.Percentiles(nil, sorted, r.percents), Min: sorted[0], Max: sorted[n-1]}
	if n < leastForPercentiles {
		out.Percentiles = slices.Repeat([]float64{nan}, len(r.percents))
	}
	out.LogMean, out.LogStd = stats.LogMoments(scratch, sorted)
	if governing := slices.Index(values, out.Max); governing >= 0 {
		m := &r.motions[r.at[governing]]
		out.Governing, out.GoverningComponent = m.record(), m.role
	}
	return out
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

// scaled returns the reduction in a unit of which one is `per` of the present.
func (r Reduction) scaled(per float64) Reduction {
	if per == 1 {
		return r
	}
	r.Mean, r.LogMean, r.Min, r.Max = r.Mean/per, r.LogMean/per, r.Min/per, r.Max/per
	percentiles := make([]float64, len(r.Percentiles))
	for i, p := range r.Percentiles {
		percentiles[i] = p / per
	}
	r.Percentiles = percentiles
	return r
}

// isDefined reports whether a figure can be printed.
func isDefined(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
