package spectrum

import (
	"errors"
	"fmt"
	"math"
)

// ErrOscillator is wrapped by every error about a period or a damping ratio.
var ErrOscillator = errors.New("invalid oscillator")

// Oscillator is a linear single-degree-of-freedom system.
type Oscillator struct {
	PeriodS float64 // undamped natural period T = 2π/ω in s
	Damping float64 // fraction of critical damping ζ
}

// Validate requires a finite period > 0 and 0 <= damping < 1. The error wraps
// ErrOscillator.
func (o Oscillator) Validate() error {
	if !(o.PeriodS > 0) || math.IsInf(o.PeriodS, 0) {
		return fmt.Errorf("%w: period %g s is not positive and finite", ErrOscillator, o.PeriodS)
	}
	if !(o.Damping >= 0 && o.Damping < 1) {
		return fmt.Errorf("%w: damping %g is not a fraction from 0 to below 1", ErrOscillator, o.Damping)
	}
	return nil
}

// Method is a way to step an oscillator through the samples.
type Method int

const (
	// NigamJennings steps exactly for acceleration that is linear between
	// samples, and takes maxima in continuous time.
	NigamJennings Method = iota
	// NewmarkAverage is Newmark's method with β = 1/4 and γ = 1/2 (average
	// acceleration), and takes maxima among samples only, the samples of one
	// period of free ringing included. It is unconditionally stable and
	// lengthens the period: without damping by the factor
	// (ω·dt/2)/atan(ω·dt/2) ≈ 1 + (ω·dt)²/12, the phase per step of its
	// amplification matrix. It is here for comparison with results computed
	// that way.
	//
	// Source: Newmark (1959); the period error of the method is discussed in
	// K.-J. Bathe and E. L. Wilson, "Stability and accuracy analysis of direct
	// integration methods", Earthquake Engineering and Structural Dynamics 1,
	// 1973, 283–291.
	NewmarkAverage
	// NewmarkLinear is the same with β = 1/6 (linear acceleration). It is stable
	// only for ω·dt < 2√3, T > 1.814·dt, and lengthens the period half as much:
	// without damping by ω·dt/θ ≈ 1 + (ω·dt)²/24, where
	// cos θ = (1 − (ω·dt)²/3)/(1 + (ω·dt)²/6).
	NewmarkLinear
)

var methodNames = [...]string{
	NigamJennings:  "nigam-jennings",
	NewmarkAverage: "newmark-average",
	NewmarkLinear:  "newmark-linear",
}

// String returns the name that ParseMethod reads.
func (m Method) String() string {
	if m.isKnown() {
		return methodNames[m]
	}
	return fmt.Sprintf("Method(%d)", int(m))
}

func (m Method) isKnown() bool { return m >= 0 && int(m) < len(methodNames) }

// ParseMethod reads the name of a method, as String writes it.
func ParseMethod(s string) (Method, error) {
	for i, name := range methodNames {
		if s == name {
			return Method(i), nil
		}
	}
	return 0, fmt.Errorf("method %q is none of %q", s, methodNames)
}

// Omega returns the circular frequency ω = 2π/T in rad/s for a period in s.
func Omega(periodS float64) float64 { return 2 * math.Pi / periodS }

// PSV returns the pseudo-velocity ω·D in m/s for a period in s and D in m.
func PSV(periodS, sd float64) float64 { return Omega(periodS) * sd }

// PSA returns the pseudo-acceleration ω²·D in m/s² for a period in s and D in
// m. As T → 0 it tends to the peak ground acceleration.
func PSA(periodS, sd float64) float64 {
	omega := Omega(periodS)
	return omega * omega * sd
}
