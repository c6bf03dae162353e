package query

import (
	"context"

	"swaybook/query/design"
)

// usualDamping is the ratio for which design spectra are given (common practice).
const usualDamping = 0.05

// overUsualDamping makes ratios of the ordinates: over those of the same motions at 5 %.
// The error is an EmptyError where nothing is left.
func (s *source) overUsualDamping(ctx context.Context, p *picked, damped *ordinates) (*ordinates, error) {
	oscillators := dampedBy(usualDamping, nil)
	for _, o := range damped.oscillators {
		o.Damping = usualDamping
		oscillators = append(oscillators, o)
	}
	usual, unfit, err := s.loadMotions(ctx, p.motions, oscillators)
	if err != nil {
		return nil, err
	}
	return damped.over(usual, p, unfit)
}

// etaStatistic is the factor of EN 1998-1 beside that of the motions.
func etaStatistic(damping float64) statistic {
	eta := design.Eta(damping)
	return statistic{title: "EN η", csv: "eta_en1998", path: []string{"eta_en1998"}, of: func(*Reduction) float64 { return eta }}
}
