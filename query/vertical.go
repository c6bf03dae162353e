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
		if p.verticals[p.motions[i].members[0].RecordID] == nil {
			without[i] = "no v component"
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
	vertical, unfit, err := s.loadMotions(ctx, verticals, horizontal.periodsS)
	if err != nil {
		return nil, err
	}
	if !p.ignoresBand {
		unusable, _ := vertical.keepUsable(verticals, -1)
		for i, reason := range unusable {
			unfit[i] = reason
		}
	}
	for i, sd := range horizontal.sd {
		horizontal.sd[i] = vertical.sd[i] / sd
		if math.IsInf(horizontal.sd[i], 0) {
			horizontal.sd[i] = math.NaN() // a horizontal of rest
		}
	}
	return horizontal.without(unfit), p.leaveOut(unfit)
}
