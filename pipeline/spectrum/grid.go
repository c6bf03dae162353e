package spectrum

import (
	"errors"
	"fmt"
)

// ErrGrid is wrapped by every error about the shape of a grid.
var ErrGrid = errors.New("invalid grid")

// Grid is a rectangular set of oscillators: every period with every damping.
type Grid struct {
	PeriodsS []float64 // s, strictly increasing
	Dampings []float64 // fractions of critical, strictly increasing
}

// Validate requires at least one period and one damping, both lists strictly
// increasing, and every oscillator valid. The error wraps ErrGrid or
// ErrOscillator.
func (g Grid) Validate() error {
	if len(g.PeriodsS) == 0 || len(g.Dampings) == 0 {
		return fmt.Errorf("%w: %d periods and %d dampings; one of each is the least", ErrGrid, len(g.PeriodsS), len(g.Dampings))
	}
	for i, t := range g.PeriodsS {
		if err := (Oscillator{PeriodS: t}).Validate(); err != nil {
			return fmt.Errorf("period %d: %w", i+1, err)
		}
		if i > 0 && t <= g.PeriodsS[i-1] {
			return fmt.Errorf("%w: period %d: %g s does not exceed %g s before it", ErrGrid, i+1, t, g.PeriodsS[i-1])
		}
	}
	for i, z := range g.Dampings {
		if err := (Oscillator{PeriodS: 1, Damping: z}).Validate(); err != nil {
			return fmt.Errorf("damping %d: %w", i+1, err)
		}
		if i > 0 && z <= g.Dampings[i-1] {
			return fmt.Errorf("%w: damping %d: %g does not exceed %g before it", ErrGrid, i+1, z, g.Dampings[i-1])
		}
	}
	return nil
}

// Oscillators lists the grid's oscillators damping by damping: period i with
// damping j stands at j*len(PeriodsS) + i.
func (g Grid) Oscillators() []Oscillator {
	list := make([]Oscillator, 0, len(g.PeriodsS)*len(g.Dampings))
	for _, z := range g.Dampings {
		for _, t := range g.PeriodsS {
			list = append(list, Oscillator{PeriodS: t, Damping: z})
		}
	}
	return list
}

// DefaultGrid returns 251 periods from 0.01 s to 10 s with 0, 2, 5, 10 and 20 %
// of critical damping, neighbouring periods 1 % to 5 % apart. Every value is the
// floating-point number nearest to its decimal.
func DefaultGrid() Grid {
	// Periods are counted in 0.1 ms: an integer over a power of ten is rounded
	// once, where a sum of steps would drift off the decimals.
	ranges := []struct{ last, step int }{
		{200, 5}, {500, 10}, {1000, 20}, {2000, 50}, {5000, 100},
		{10000, 200}, {20000, 500}, {100000, 1000},
	}
	const first, perSecond = 100, 10000
	periods := []float64{float64(first) / perSecond}
	n := first
	for _, r := range ranges {
		for n < r.last {
			n += r.step
			periods = append(periods, float64(n)/perSecond)
		}
	}
	return Grid{PeriodsS: periods, Dampings: []float64{0, 0.02, 0.05, 0.10, 0.20}}
}
