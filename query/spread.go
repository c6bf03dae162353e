package query

import (
	"math"

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

// eventsOf number the events of motions, by position, -1 where unknown.
func eventsOf(motions []motion) []int {
	out := numbered(motions, func(m *motion) string {
		if e := m.members[0].Record.Event; e != nil {
			return e.Code
		}
		return ""
	})
	for i := range motions {
		if motions[i].members[0].Record.Event == nil {
			out[i] = -1
		}
	}
	return out
}

// spread takes values in the order of the sample; those of unknown events do not count.
func (r *reducer) spread(values []float64) *spread {
	r.logs, r.groups = r.logs[:0], r.groups[:0]
	for k, x := range values {
		if event := r.events[r.at[k]]; event >= 0 && x > 0 { // NaN is not
			r.logs, r.groups = append(r.logs, stats.Log(x)), append(r.groups, event)
		}
	}
	fit := r.fitter.Fit(r.logs, r.groups, mixed.REML)
	return &spread{fit.Tau, fit.Phi, fit.Sigma, stats.Exp(fit.Mu), fit.Groups}
}

func spreadStatistics() []statistic {
	of := func(part func(*spread) float64) func(*Reduction) float64 {
		return func(r *Reduction) float64 {
			if r.extra.spread == nil {
				return math.NaN()
			}
			return part(r.extra.spread)
		}
	}
	return []statistic{
		{title: "events", csv: "spread_events", path: []string{"spread", "events"}, of: of(func(s *spread) float64 { return float64(s.events) }), text: wholeNumber},
		{title: "exp µ", csv: "spread_log_mean", path: []string{"spread", "log_mean"}, hasUnit: true, of: of(func(s *spread) float64 { return s.logMean })},
		{title: "tau", csv: "tau_ln", path: []string{"spread", "tau"}, of: of(func(s *spread) float64 { return s.tau })},
		{title: "phi", csv: "phi_ln", path: []string{"spread", "phi"}, of: of(func(s *spread) float64 { return s.phi })},
		{title: "sigma", csv: "sigma_ln", path: []string{"spread", "sigma"}, of: of(func(s *spread) float64 { return s.sigma })},
	}
}
