package query

import (
	"context"
	"fmt"
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
	"swaybook/query/stats"
)

// onGrid refuses oscillators between no spectra of the grid.
func onGrid(grid *db.Grid, o spectrum.Oscillator) error {
	periods, dampings := ascending(grid.PeriodsS), ascending(grid.Dampings)
	inside := func(list []float64, x float64) bool { return len(list) > 0 && x >= list[0] && x <= list[len(list)-1] }
	switch {
	case !inside(periods, o.PeriodS):
		return fmt.Errorf("the period %v s is outside the grid's; --ordinates exact computes it", o.PeriodS)
	case !inside(dampings, o.Damping):
		return fmt.Errorf("the damping %s is outside the grid's; --ordinates exact computes it", percentText(o.Damping))
	}
	return nil
}

// bracket is where a value lies in an ascending list: between those of positions low and
// high, at this share of the way in the transformed value.
type bracket struct {
	low, high int
	share     float64
}

// bracketOf finds x in a list that it does not lie outside of.
func bracketOf(list []float64, x float64, transformed func(float64) float64) bracket {
	at, found := slices.BinarySearch(list, x)
	if found {
		return bracket{at, at, 0}
	}
	low, high := transformed(list[at-1]), transformed(list[at])
	return bracket{at - 1, at, (transformed(x) - low) / (high - low)}
}

// gridSpectra are the logarithms of the stored ordinates, and of those that had to be
// computed in their place.
type gridSpectra struct {
	periods, dampings []float64 // ascending
	logs              *ordinates
	unfit             map[int]string
}

// byDamping transforms a damping ratio so that ln SD is nearly straight in it: the
// reduction factors of common practice are powers of 5 % + ζ.
func byDamping(zeta float64) float64 { return math.Log(0.05 + zeta) }

// readGrid loads the whole grid of the motions.
func (w *portfolioWork) readGrid(ctx context.Context) error {
	grid := &w.source.snapshot.Generation.Grid
	g := &gridSpectra{periods: ascending(grid.PeriodsS), dampings: ascending(grid.Dampings)}
	var oscillators []spectrum.Oscillator
	for _, zeta := range g.dampings {
		oscillators = append(oscillators, dampedBy(zeta, g.periods)...)
	}
	var err error
	if g.logs, g.unfit, err = w.source.loadMotions(ctx, w.picked.motions, oscillators); err != nil {
		return err
	}
	err = inParallel(ctx, len(oscillators), func(_ context.Context, p int) error {
		for i, sd := range g.logs.at(p) {
			g.logs.at(p)[i] = stats.Log(sd)
		}
		return nil
	})
	w.grid = g
	return err
}

// interpolated are ordinates between those of the grid: ln SD straight in ln T, and in
// ln(5 % + ζ). Those on the grid are as stored to rounding.
func (w *portfolioWork) interpolated(ctx context.Context, oscillators []spectrum.Oscillator) (*ordinates, map[int]string, error) {
	if w.grid == nil {
		if err := w.readGrid(ctx); err != nil {
			return nil, nil, err
		}
	}
	o := newOrdinates(oscillators, w.grid.logs.motions)
	return o, w.grid.unfit, inParallel(ctx, len(oscillators), func(_ context.Context, p int) error {
		w.grid.interpolate(o.at(p), oscillators[p])
		return nil
	})
}

func (g *gridSpectra) interpolate(dst []float64, o spectrum.Oscillator) {
	t, zeta := bracketOf(g.periods, o.PeriodS, math.Log), bracketOf(g.dampings, o.Damping, byDamping)
	at := func(damping, period int) []float64 { return g.logs.at(damping*len(g.periods) + period) }
	a, b := at(zeta.low, t.low), at(zeta.low, t.high)
	c, d := at(zeta.high, t.low), at(zeta.high, t.high)
	between := func(low, high, share float64) float64 {
		if share == 0 {
			return low
		}
		return low + float64(share*(high-low))
	}
	for i := range dst {
		dst[i] = stats.Exp(between(between(a[i], b[i], t.share), between(c[i], d[i], t.share), zeta.share))
	}
}

// GridError is how far interpolated ordinates are from exact ones, as ratios less 1
// without sign, of a sample of the asked oscillators and motions.
type GridError struct {
	Oscillators, Motions int
	Median, P95, Max     float64
}

// errorSample is the number of oscillators, and of motions, of which exact ordinates are
// computed to tell the error of others.
const errorSample = 40

// gridError compares a sample; nil where ordinates are exact, or all on the grid.
func (w *portfolioWork) gridError(ctx context.Context) (*GridError, error) {
	if w.grid == nil {
		return nil, nil
	}
	var wanted, off []spectrum.Oscillator
	for _, p := range w.plans {
		wanted = append(wanted, p.wanted...)
	}
	for _, i := range evenly(w.source.find(wanted).missing, errorSample) {
		off = append(off, wanted[i])
	}
	which := slices.DeleteFunc(upTo(len(w.picked.motions)), func(i int) bool { _, isOut := w.unfit[i]; return isOut })
	which = evenly(which, errorSample)
	if len(off) == 0 || len(which) == 0 {
		return nil, nil
	}
	motions := make([]motion, len(which))
	for k, i := range which {
		motions[k] = w.picked.motions[i]
	}
	exact, unfit, err := w.source.loadMotions(ctx, motions, off)
	if err != nil {
		return nil, err
	}
	if !w.picked.ignoresBand {
		exact.keepUsable(motions, -1)
	}
	near, _, err := w.interpolated(ctx, off)
	if err != nil {
		return nil, err
	}
	return compareOrdinates(exact, near, which, unfit), nil
}

// compareOrdinates takes motion which[k] of near beside motion k of exact.
func compareOrdinates(exact, near *ordinates, which []int, unfit map[int]string) *GridError {
	e := &GridError{Oscillators: len(exact.oscillators), Motions: len(which) - len(unfit)}
	var errs []float64
	for p := range exact.oscillators {
		for k, sd := range exact.at(p) {
			if _, isOut := unfit[k]; !isOut && sd > 0 {
				errs = append(errs, math.Abs(near.at(p)[which[k]]/sd-1))
			}
		}
	}
	slices.Sort(errs)
	found := stats.Percentiles(nil, errs, []float64{50, 95, 100})
	e.Median, e.P95, e.Max = found[0], found[1], found[2]
	return e
}

// evenly takes at most n of a list, evenly.
func evenly[T any](list []T, n int) []T {
	if len(list) <= n {
		return list
	}
	out := make([]T, n)
	for i := range out {
		out[i] = list[i*len(list)/n]
	}
	return out
}
