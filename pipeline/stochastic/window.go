package stochastic

import (
	"fmt"
	"math"
)

// Window is the exponential shape of a motion in time,
//
//	w(t) = (e/ε)^b·(t/T)^b·exp(−(b/ε)·t/T) for 0 ≤ t ≤ T, else 0,
//	b = −ε·ln η/(1 + ε·(ln ε − 1)),
//
// which rises to 1 at t = ε·T and has fallen to η at its end T, Stretch times
// the duration of ground motion.
//
// Source: G. R. Saragoni & G. C. Hart (1974), Earthquake Engineering and
// Structural Dynamics 2:249–267, with the parameters of Boore (2003).
type Window struct {
	Epsilon float64 // ε, place of the maximum, 0 < ε < 1
	Eta     float64 // η, value at the end, 0 < η < 1
	Stretch float64 // T over the duration of ground motion, > 0
}

// StandardWindow is the window with ε = 0.2, η = 0.05 and T twice the duration of
// ground motion.
//
// Source: Boore (2003).
func StandardWindow() Window { return Window{Epsilon: 0.2, Eta: 0.05, Stretch: 2} }

func (w Window) validate() error {
	if !(w.Epsilon > 0 && w.Epsilon < 1) || !(w.Eta > 0 && w.Eta < 1) {
		return fmt.Errorf("stochastic: window ε %g and η %g must lie between 0 and 1", w.Epsilon, w.Eta)
	}
	if !(w.Stretch > 0) || math.IsInf(w.Stretch, 0) {
		return fmt.Errorf("stochastic: window stretch is %g", w.Stretch)
	}
	return nil
}

// At returns the window at the time fraction t/T.
func (w Window) At(fraction float64) float64 {
	if fraction <= 0 || fraction > 1 {
		return 0
	}
	b := w.power()
	// One exponential of a sum of logarithms instead of three powers.
	e := 1 - math.Log(w.Epsilon) + math.Log(fraction) - fraction/w.Epsilon
	return math.Exp(b * e)
}

func (w Window) power() float64 {
	return -w.Epsilon * math.Log(w.Eta) / (1 + float64(w.Epsilon*(math.Log(w.Epsilon)-1)))
}
