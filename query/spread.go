package query

import (
	"swaybook/query/mixed"
	"swaybook/query/stats"
)

// spread parts the deviation of ln into what lies between events and what lies within
// them, one-way random effects by restricted maximum likelihood (mixed.Fit).
type spread struct {
	tau, phi, sigma float64
	logMean         float64 // exp μ, in the quantity's unit
	events          int
}

// spread takes values in the order of the sample; those of unknown events do not count.
func (r *reducer) spread(values []float64) *spread {
	r.logs, r.groups = r.logs[:0], r.groups[:0]
	for k, x := range values {
		at := r.at[k]
		if r.motions[at].members[0].Record.Event != nil && x > 0 { // NaN is not
			r.logs, r.groups = append(r.logs, stats.Log(x)), append(r.groups, r.events[at])
		}
	}
	fit := r.fitter.Fit(r.logs, r.groups, mixed.REML)
	return &spread{fit.Tau, fit.Phi, fit.Sigma, stats.Exp(fit.Mu), fit.Groups}
}

func spreadStatistics() []statistic {
	of := func(part func(*spread) float64) func(*Reduction) float64 {
		return ofExtra(func(e *extraFigures) *spread { return e.spread }, part)
	}
	return []statistic{
		{title: "events", csv: "spread_events", path: []string{"spread", "events"}, of: of(func(s *spread) float64 { return float64(s.events) }), text: wholeNumber},
		{title: "exp µ", csv: "spread_log_mean", path: []string{"spread", "log_mean"}, hasUnit: true, of: of(func(s *spread) float64 { return s.logMean })},
		{title: "tau", csv: "tau_ln", path: []string{"spread", "tau"}, of: of(func(s *spread) float64 { return s.tau })},
		{title: "phi", csv: "phi_ln", path: []string{"spread", "phi"}, of: of(func(s *spread) float64 { return s.phi })},
		{title: "sigma", csv: "sigma_ln", path: []string{"spread", "sigma"}, of: of(func(s *spread) float64 { return s.sigma })},
	}
}
