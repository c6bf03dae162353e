package query

import (
	"math"

	"swaybook/pipeline/spectrum"
)

// ordinates holds the SD in m of motions, of oscillators. Values of one oscillator
// stand together, since that is how statistics read them.
type ordinates struct {
	oscillators []spectrum.Oscillator
	motions     int
	sd          []float64
}

func newOrdinates(oscillators []spectrum.Oscillator, motions int) *ordinates {
	return &ordinates{oscillators: oscillators, motions: motions, sd: make([]float64, len(oscillators)*motions)}
}

// dampedBy are the oscillators of periods in s and one damping.
func dampedBy(damping float64, periodsS []float64) []spectrum.Oscillator {
	out := make([]spectrum.Oscillator, len(periodsS))
	for i, t := range periodsS {
		out[i] = spectrum.Oscillator{PeriodS: t, Damping: damping}
	}
	return out
}

// at returns the values of all motions of the oscillator of this position.
func (o *ordinates) at(position int) []float64 {
	return o.sd[position*o.motions : (position+1)*o.motions]
}

// without returns the ordinates without some motions.
func (o *ordinates) without(motions map[int]string) *ordinates {
	if len(motions) == 0 {
		return o
	}
	out := newOrdinates(o.oscillators, o.motions-len(motions))
	sd := out.sd[:0]
	for p := range o.oscillators {
		for i, d := range o.at(p) {
			if _, isOut := motions[i]; !isOut {
				sd = append(sd, d)
			}
		}
	}
	return out
}

// Measure is the quantity of a spectrum.
type Measure string

// Spectral displacement in m, pseudo-velocity in m/s, pseudo-acceleration in g, and two
// ratios, which are those of all three: of the vertical spectrum to the horizontal one, and
// of the spectrum to that of 5 % damping.
const (
	MeasureSD  Measure = "sd"
	MeasurePSV Measure = "psv"
	MeasurePSA Measure = "psa"
	MeasureVH  Measure = "vh"
	MeasureEta Measure = "eta"
)

// ParseMeasure reads "sd", "psv", "psa", "vh" or "eta". The empty text gives MeasurePSA.
func ParseMeasure(text string) (Measure, error) {
	if text == "" {
		return MeasurePSA, nil
	}
	m := Measure(text)
	return m, m.validate()
}

func (m Measure) validate() error {
	if m == MeasureSD || m == MeasurePSV || m == MeasurePSA || m.isRatio() {
		return nil
	}
	return usage("measure", "unknown measure %q; accepted: sd, psv, psa, vh, eta", string(m))
}

// isRatio reports whether the measure is a ratio of spectra.
func (m Measure) isRatio() bool { return m == MeasureVH || m == MeasureEta }

// omega is 2π/T, the number that the store keeps beside each period.
func omega(periodS float64) float64 { return 2 * math.Pi / periodS }

// of returns the measure of an SD in m at ω in rad/s, in the order of operations
// of the store's view, so that both give the same bits.
func (m Measure) of(sd, omega float64) float64 {
	switch m {
	case MeasurePSV:
		return sd * omega
	case MeasurePSA:
		return sd * omega * omega / StandardGravity
	}
	return sd
}

// put takes in the SD of one member of motion i of some of the oscillators, sd[k]
// of that of position positions[k], where that is not negative. The members come one
// after another.
func (o *ordinates) put(i int, m *motion, isFirst bool, positions []int, sd []float64) {
	combine := func(_, next float64) float64 { return next }
	if !isFirst {
		combine = combiner(Component(m.role))
	}
	for k, p := range positions {
		if p < 0 {
			continue
		}
		into := &o.sd[p*o.motions+i]
		*into = combine(*into, sd[k])
	}
}
