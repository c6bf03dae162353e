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
	return vertical.over(horizontal, p, unfit)
}

// over divides ordinates by others of the same motions and oscillators, and leaves out the
// unfit and those that have no ratio.
func (o *ordinates) over(below *ordinates, p *picked, unfit map[int]string) (*ordinates, error) {
	known := make([]bool, o.motions)
	for k, sd := range below.sd {
		o.sd[k] /= sd
		if math.IsInf(o.sd[k], 0) {
			o.sd[k] = math.NaN() // over rest
		}
		known[k%o.motions] = known[k%o.motions] || !math.IsNaN(o.sd[k])
	}
	for i, isKnown := range known {
		if _, isOut := unfit[i]; !isKnown && !isOut {
			unfit[i] = reasonUnusable
		}
	}
	return o.without(unfit), p.leaveOut(unfit)
}
