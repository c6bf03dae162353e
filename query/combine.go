package query

import (
	"math"
	"slices"

	"swaybook/query/modal"
)

// combined reduces what the motions demand of a structure of several modes. Displacement
// and PSA are those of the first mode. Base shear and moment of mode i,
//
//	V = r·m·A    M = V·h
//
// of its participating share r of the mass m and its effective height h, are combined
// motion by motion, by the square root of the sum of squares (SRSS) and by complete
// quadratic combination (CQC), and the combinations reduced.
//
// Source: A. K. Chopra, Dynamics of Structures, 4th ed., Prentice Hall 2012, sections 13.7
// and 13.8 (cited from memory).
func (p *plan) combined(r *reducer, o *ordinates, also func(name string, x *Reduction)) []Quantity {
	s := p.structure
	first := Structure{PeriodS: s.PeriodS, Damping: s.Damping}
	out := first.reduce(r, o, p.at[:1], also)
	out = slices.DeleteFunc(out, func(q Quantity) bool { return q.Reduction == nil || q.Name == "psv_m_s" })
	rho := s.correlation()
	for _, c := range []struct {
		name     string
		isMoment bool
		combine  func([]float64) float64
	}{
		{"base_shear_n", false, func(v []float64) float64 { return modal.CQC(v, rho) }},
		{"base_shear_srss_n", false, modal.SRSS},
		{"base_moment_nm", true, func(v []float64) float64 { return modal.CQC(v, rho) }},
		{"base_moment_srss_nm", true, modal.SRSS},
	} {
		quantity := Quantity{Name: c.name}
		values := p.combine(r, o, c.isMoment, c.combine)
		if slices.ContainsFunc(values, isDefined) {
			x := r.reduce(values, math.NaN())
			quantity.Reduction = &x
			also(c.name, &x)
		}
		out = append(out, quantity)
	}
	return out
}

// correlation are the CQC coefficients of the modes.
func (s *PortfolioStructure) correlation() modal.Matrix {
	periods, dampings := make([]float64, len(s.Modes)), make([]float64, len(s.Modes))
	for i, m := range s.Modes {
		periods[i], dampings[i] = m.PeriodS, m.Damping
	}
	return modal.Correlation(periods, dampings)
}

// combine gives one value a motion of the sample, NaN where a mode has none.
func (p *plan) combine(r *reducer, o *ordinates, isMoment bool, combine func([]float64) float64) []float64 {
	s := p.structure
	factors := make([]float64, len(s.Modes)) // of SD in m
	for i, m := range s.Modes {
		w := omega(m.PeriodS)
		factors[i] = m.MassRatio * orNaN(s.MassKG) * w * w
		if isMoment {
			factors[i] *= orNaN(m.HeightM)
		}
	}
	values, peaks := make([]float64, len(r.at)), make([]float64, len(s.Modes))
	for k, motion := range r.at {
		values[k] = 0
		for i := range s.Modes {
			peaks[i] = factors[i] * o.at(p.at[i])[motion]
			values[k] += peaks[i] // NaN where one is
		}
		if !math.IsNaN(values[k]) {
			values[k] = combine(peaks)
		}
	}
	return values
}
