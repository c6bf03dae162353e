package query

import (
	"math"

	"swaybook/query/design"
	"swaybook/query/modal"
)

// eachCombined gives of the motions at these places what they demand of a structure of
// several modes. Displacement and PSA are those of the first mode. Base shear and moment of
// mode i,
//
//	V = r·m·A    M = V·h
//
// of its participating share r of the mass m and its effective height h, are combined
// motion by motion, by complete quadratic combination (CQC) and by the square root of the
// sum of squares (SRSS).
//
// Source: A. K. Chopra, Dynamics of Structures, 4th ed., Prentice Hall 2012, sections 13.7
// and 13.8 (cited from memory).
func (p *plan) eachCombined(o *ordinates, at []int, d *design.Spectrum, give forEach) {
	s := p.structure
	first := Structure{PeriodS: s.PeriodS, Damping: s.Damping}
	first.each(o, p.at[:1], at, d, func(name string, values []float64, level float64) {
		if name == "sd_m" || name == "psa_g" {
			give(name, values, level)
		}
	})
	rho := s.correlation()
	cqc := func(peaks []float64) float64 { return modal.CQC(peaks, rho) }
	for _, c := range []struct {
		name     string
		isMoment bool
		combine  func([]float64) float64
	}{
		{"base_shear_n", false, cqc}, {"base_shear_srss_n", false, modal.SRSS},
		{"base_moment_nm", true, cqc}, {"base_moment_srss_nm", true, modal.SRSS},
	} {
		give(c.name, p.combine(o, at, c.isMoment, c.combine), math.NaN())
	}
}

// correlation are the CQC coefficients of the modes.
func (s *PortfolioStructure) correlation() modal.Matrix {
	periods, dampings := make([]float64, len(s.Modes)), make([]float64, len(s.Modes))
	for i, m := range s.Modes {
		periods[i], dampings[i] = m.PeriodS, m.Damping
	}
	return modal.Correlation(periods, dampings)
}

// combine gives one value a motion, NaN where a mode has none.
func (p *plan) combine(o *ordinates, at []int, isMoment bool, combine func([]float64) float64) []float64 {
	s := p.structure
	factors := make([]float64, len(s.Modes)) // of SD in m
	for i, m := range s.Modes {
		w := omega(m.PeriodS)
		factors[i] = m.MassRatio * orNaN(s.MassKG) * w * w
		if isMoment {
			factors[i] *= orNaN(m.HeightM)
		}
	}
	values, peaks := make([]float64, len(at)), make([]float64, len(s.Modes))
	for k, motion := range at {
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
