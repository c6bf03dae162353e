package query

import (
	"context"
	"fmt"
	"iter"
	"slices"
	"strings"

	"swaybook/db"
)

// motion is what statistics count as one: a component, or a horizontal pair.
type motion struct {
	members []*db.HeldComponent // one or two, of one record
	role    string              // the component's role, or the pair's Component
	rotated *db.Peaks           // of a rotated pair, nil where nobody asked
}

func (m *motion) record() string { return m.members[0].Record.Code }

// picked is a selection carried out: its motions in the order of record code
// and role.
type picked struct {
	motions []motion
	report  SelectionReport
	unmet   int
	held    int
}

// pick carries out a selection whose defaults are filled in. Of the components
// it reads these details and what the expression uses. The error is an EmptyError
// where no motion is left, beside what was counted.
func pick(ctx context.Context, snapshot *db.Snapshot, s Selection, details db.Details) (*picked, error) {
	condition, err := compileWhere(s.Where)
	if err != nil {
		return nil, err
	}
	sitings, err := s.Siting.taken()
	if err != nil {
		return nil, err
	}
	details |= condition.details()
	if s.Component.IsRotated() || s.Component == ComponentAll {
		details |= db.DetailMotion // by which pairs are rotated
	}
	held, err := snapshot.Components(ctx, details)
	if err != nil {
		return nil, err
	}
	p := &picker{selection: s, condition: condition, sitings: sitings, leftOut: map[string]int{}}
	if p.rotated, err = rotatedOf(ctx, snapshot, s.Component, details, held); err != nil {
		return nil, err
	}
	p.report = SelectionReport{Where: s.Where, Component: s.Component, Siting: s.Siting}
	p.motions = make([]motion, 0, len(held))
	for components := range byRecord(held) {
		if err := p.take(components); err != nil {
			return nil, err
		}
	}
	return p.finish()
}

// byRecord yields the components of one record after another.
func byRecord(held []db.HeldComponent) iter.Seq[[]db.HeldComponent] {
	return func(yield func([]db.HeldComponent) bool) {
		for from := 0; from < len(held); {
			to := from + 1
			for to < len(held) && held[to].RecordID == held[from].RecordID {
				to++
			}
			if !yield(held[from:to]) {
				return
			}
			from = to
		}
	}
}

// picker sorts records into taken, unmet and left out.
type picker struct {
	picked
	selection Selection
	condition *where
	sitings   map[string]bool
	leftOut   map[string]int  // records by reason
	reasons   []string        // in order of first use
	events    map[string]bool // codes
	unknown   int             // records of unknown siting that are taken
	assumed   int             // records taken whose horizontals are assumed at a right angle
	// rotated has peaks of rotated pairs by role and the record's id.
	rotated map[string]map[int64]db.Peaks
}

// take looks at the components of one record. A record counts once as unmet if
// none of its motions meets the expression, and once for every reason that
// leaves a motion of it out. The expression is asked first, so that reasons
// count only what the question is about.
func (p *picker) take(components []db.HeldComponent) error {
	p.held++
	candidates, lacking := p.candidatesOf(components)
	before, unmet := len(p.motions), len(candidates) > 0
	var reasons []string
	for _, m := range candidates {
		reason, met, err := p.judge(&m, lacking)
		switch {
		case err != nil:
			return err
		case reason != "":
			unmet = false
			if !slices.Contains(reasons, reason) {
				reasons = append(reasons, reason)
			}
		case met:
			unmet = false
			p.motions = append(p.motions, m)
		}
	}
	if unmet {
		p.unmet++
	}
	p.count(reasons)
	if len(p.motions) > before {
		p.note(p.motions[before:])
	}
	return nil
}

// judge says whether a motion is taken, or why it is left out.
func (p *picker) judge(m *motion, lacking string) (reason string, met bool, err error) {
	unknown := ""
	if p.condition != nil {
		a := m.attributes()
		if unknown = p.condition.unknown(&a); unknown == "" {
			if met, err = p.condition.met(&a); err != nil || !met {
				return "", false, err
			}
		}
	}
	siting := m.members[0].Record.Siting
	switch {
	case !p.sitings[siting]:
		return "siting " + siting, false, nil
	case lacking != "":
		return lacking, false, nil
	case unknown != "":
		return unknown + " unknown", false, nil
	}
	return "", true, nil
}

func (p *picker) count(reasons []string) {
	for _, r := range reasons {
		if p.leftOut[r] == 0 {
			p.reasons = append(p.reasons, r)
		}
		p.leftOut[r]++
	}
}

// note counts a record that contributes these motions.
func (p *picker) note(motions []motion) {
	p.report.Records++
	if slices.ContainsFunc(motions, func(m motion) bool { return m.isAssumed() }) {
		p.assumed++
	}
	r := motions[0].members[0].Record
	if r.Siting == "unknown" {
		p.unknown++
	}
	if r.Event == nil {
		return
	}
	if p.events == nil {
		p.events = map[string]bool{}
	}
	p.events[r.Event.Code] = true
}

func (p *picker) finish() (*picked, error) {
	slices.Sort(p.reasons)
	for _, r := range p.reasons {
		p.report.LeftOut = append(p.report.LeftOut, LeftOut{Reason: r, Records: p.leftOut[r]})
	}
	p.report.Spectra, p.report.Events = len(p.motions), len(p.events)
	if p.unknown > 0 && p.selection.Siting != "unknown" {
		p.report.Notes = append(p.report.Notes, countOf(p.unknown, "record", "records")+" of unknown siting among them")
	}
	if p.assumed > 0 {
		p.report.Notes = append(p.report.Notes, countOf(p.assumed, "record", "records")+" of unknown azimuth among them, the horizontals taken at a right angle")
	}
	if len(p.motions) == 0 {
		return &p.picked, &EmptyError{Held: p.held, Unmet: p.unmet, LeftOut: p.report.LeftOut, Hint: p.hint()}
	}
	return &p.picked, nil
}

// hint says what to ask where the expression asks a pair for the role of one
// component, which it never has.
func (p *picker) hint() string {
	if p.selection.Component.IsPair() && p.condition.uses("component") {
		return fmt.Sprintf("the expression sees the component %q: ask for h1, h2, v or each instead", p.selection.Component)
	}
	return ""
}

// attributes are those of the component, or of the pair.
func (m *motion) attributes() attributes {
	if len(m.members) == 2 {
		return pairAttributes(m)
	}
	a := componentAttributes(m.members[0])
	a.Component = m.role
	return a
}

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
		if c.IsRotated() {
			lacking = notRotatable(horizontal[0], horizontal[1])
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
