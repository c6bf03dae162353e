package query

import (
	"slices"
	"strings"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// candidatesOf returns the motions that a record's components, in order of
// role, make. Where they cannot make the asked one, lacking says why and the
// candidate is a stand-in of which the expression can be asked.
func (p *picker) candidatesOf(components []db.HeldComponent) (candidates []motion, lacking string) {
	c := p.selection.Component
	var horizontal []*db.HeldComponent
	for i := range components {
		held := &components[i]
		isHorizontal := held.Role == db.RoleH1 || held.Role == db.RoleH2
		if isHorizontal {
			horizontal = append(horizontal, held)
		}
		if c == ComponentAll || c == ComponentRecorded || c == ComponentEach && isHorizontal || string(c) == held.Role {
			candidates = append(candidates, motion{members: []*db.HeldComponent{held}, role: held.Role})
		}
	}
	switch {
	case c.IsPair():
		return p.pairOf(horizontal, components)
	case c == ComponentAll:
		return p.withRotated(candidates, horizontal), ""
	case len(candidates) > 0:
		return candidates, ""
	}
	standIn := []motion{{members: []*db.HeldComponent{&components[0]}, role: string(c)}}
	if c == ComponentEach {
		return standIn, "no horizontal component"
	}
	return standIn, "no " + string(c) + " component"
}

func (p *picker) pairOf(horizontal []*db.HeldComponent, components []db.HeldComponent) (candidates []motion, lacking string) {
	c := p.selection.Component
	switch len(horizontal) {
	case 2:
		lacking = notRotatable(horizontal[0], horizontal[1])
		if !c.IsRotated() && lacking != spectrum.ReasonDirections {
			lacking = "" // ordinates can be combined whatever the steps and starts
		}
		if lacking == "" && p.damaged[components[0].RecordID] {
			lacking = reasonDamaged
		}
	case 1:
		lacking = "one horizontal component only"
	default:
		horizontal = []*db.HeldComponent{&components[0]}
		lacking = "no horizontal component"
	}
	m := motion{members: horizontal, role: string(c)}
	if peaks, ok := p.rotated[m.role][components[0].RecordID]; ok {
		m.rotated = &peaks
	}
	return []motion{m}, lacking
}

// withRotated adds what is stored of the pair over all directions, in the order
// of roles.
func (p *picker) withRotated(candidates []motion, horizontal []*db.HeldComponent) []motion {
	if len(horizontal) < 2 {
		return candidates
	}
	for role, stored := range p.rotated {
		if peaks, ok := stored[horizontal[0].RecordID]; ok {
			candidates = append(candidates, motion{members: horizontal, role: role, rotated: &peaks})
		}
	}
	slices.SortFunc(candidates, func(a, b motion) int { return strings.Compare(a.role, b.role) })
	return candidates
}
