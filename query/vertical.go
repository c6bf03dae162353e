package query

import (
	"context"
	"math"

	"swaybook/db"
)

// overHorizontal makes ratios of the ordinates: those of each motion's vertical component
// over its own. Motions whose record has no vertical one are left out, and so are those
// of which the vertical one cannot be had, or shares no usable period with it. The error
// is an EmptyError where nothing is left.
func (s *source) overHorizontal(ctx context.Context, p *picked, horizontal *ordinates) (*ordinates, error) {
	without := map[int]string{}
	for i := range p.motions {
		v := p.verticals[p.motions[i].members[0].RecordID]
		if v == nil {
			without[i] = "no v component"
		} else if reason := p.screen.screened(&motion{members: []*db.HeldComponent{v}}); reason != "" {
			without[i] = "screened out: " + reason
		}
	}
	horizontal = horizontal.without(without)
	if err := p.leaveOut(without); err != nil {
		return nil, err
	}
	verticals := make([]motion, len(p.motions))
	for i := range p.motions {
		verticals[i] = motion{members: []*db.HeldComponent{p.verticals[p.motions[i].members[0].RecordID]}, role: db.RoleV}
	}
	vertical, unfit, err := s.loadMotions(ctx, verticals, horizontal.oscillators)
	if err != nil {
		return nil, err
	}
	if !p.ignoresBand {
		unusable, _, _ := vertical.keepUsable(verticals, -1)
		for i, reason := range unusable {
			unfit[i] = reason
		}
	}
	known := make([]bool, len(verticals))
	for k, sd := range horizontal.sd {
		horizontal.sd[k] = vertical.sd[k] / sd
		if math.IsInf(horizontal.sd[k], 0) {
			horizontal.sd[k] = math.NaN() // a horizontal of rest
		}
		known[k%len(verticals)] = known[k%len(verticals)] || !math.IsNaN(horizontal.sd[k])
	}
	for i, isKnown := range known {
		if _, isOut := unfit[i]; !isKnown && !isOut {
			unfit[i] = reasonUnusable
		}
	}
	return horizontal.without(unfit), p.leaveOut(unfit)
}
