package query

import (
	"context"
	"fmt"
	"iter"
	"slices"

	"swaybook/db"
)

// motion is what statistics count as one: a component, or a horizontal pair.
type motion struct {
	members []*db.HeldComponent // one or two, of one record
	role    string              // the component's role, or the pair's Component
	rotated *db.Peaks           // of a rotated pair, nil where nobody asked
	// versionOf is the code of the record from which statistics take the motion
	// instead, "" for none.
	versionOf string
}

func (m *motion) record() string { return m.members[0].Record.Code }

// picked is a selection carried out: its motions in the order of record code
// and role.
type picked struct {
	motions []motion
	report  SelectionReport
	unmet   int
	outside int
	held    int
	leftOut map[string]int // records by reason
	hint    string         // where nothing is left
	// verticals are the vertical components by record.
	verticals map[int64]*db.HeldComponent
	screen    Screen
	// versions are those among which load takes the best, none where all count.
	versions versions
	// ignoresBand says that ordinates outside the usable band count.
	ignoresBand bool
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
	details |= condition.details() | s.Scope.details() | s.Balance.details()
	if s.Component.IsRotated() || s.Component == ComponentAll || !s.IncludeUnknownDirections {
		details |= db.DetailMotion // by which pairs are rotated, and what is horizontal
	}
	if !s.IgnoreUsableBand {
		details |= db.DetailBand
	}
	if s.Screen != ScreenNone {
		details |= db.DetailBand // behind a recipe other findings count
	}
	held, err := snapshot.Components(ctx, details)
	if err == nil && details&db.DetailFindings == 0 {
		err = snapshot.Flag(ctx, held, s.Screen.flags())
	}
	if err != nil {
		return nil, err
	}
	isLatest := s.Scope.Event == EventLatest
	if isLatest {
		s.Scope.Event = "" // until it is known what everything else takes
	}
	p := &picker{selection: s, condition: condition, sitings: sitings, details: details}
	p.hint, p.leftOut, p.ignoresBand, p.screen = p.hintOf(), map[string]int{}, s.IgnoreUsableBand, s.Screen
	p.report = SelectionReport{Where: s.Where, Scope: s.Scope, Component: s.Component, Siting: s.Siting, Recipe: snapshot.Generation.Recipe.Name, Screen: s.Screen, Balance: s.Balance}
	p.motions = make([]motion, 0, len(held))
	p.verticals = map[int64]*db.HeldComponent{}
	for i := range held {
		if held[i].Role == db.RoleV {
			p.verticals[held[i].RecordID] = &held[i]
		}
	}
	if err := p.findRotated(ctx, snapshot, details, held); err != nil {
		return nil, err
	}
	if err := p.findUnsolved(ctx, snapshot); err != nil {
		return nil, err
	}
	if err := p.takeAll(held); err != nil {
		return nil, err
	}
	if isLatest {
		if err := p.takeLatest(held); err != nil {
			return nil, err
		}
	}
	if err := p.findRepeated(ctx, snapshot); err != nil {
		return nil, err
	}
	return &p.picked, p.finish()
}

func (p *picker) takeAll(held []db.HeldComponent) error {
	for components := range byRecord(held) {
		if err := p.take(components); err != nil {
			return err
		}
	}
	return nil
}

// takeLatest takes, of what was taken, the last event.
func (p *picker) takeLatest(held []db.HeldComponent) error {
	if len(p.motions) == 0 {
		return nil
	}
	code := latestOf(p.motions)
	p.motions, p.leftOut, p.unmet, p.outside, p.held = p.motions[:0], map[string]int{}, 0, 0, 0
	if code == "" {
		p.hint = "of no motion that is selected the time of the event is known"
		return nil
	}
	p.selection.Scope.Event, p.report.Scope.Event = code, code
	return p.takeAll(held)
}

// findRepeated reads which motions are versions of one. Where all are asked for it names
// the better one; of others load takes the best at every period.
func (p *picker) findRepeated(ctx context.Context, snapshot *db.Snapshot) error {
	versions, err := readVersions(ctx, snapshot)
	if err != nil {
		return err
	}
	if !p.selection.IncludeDuplicates {
		p.versions = versions
		return nil
	}
	for i, code := range versions.repeated(p.motions) {
		p.motions[i].versionOf = code
	}
	return nil
}

// byRecord yields the components of one record after another.
func byRecord(held []db.HeldComponent) iter.Seq[[]db.HeldComponent] {
	return runs(held, func(c *db.HeldComponent) int64 { return c.RecordID })
}

// runs yields the runs of items with equal keys.
func runs[T any, K comparable](items []T, key func(*T) K) iter.Seq[[]T] {
	return func(yield func([]T) bool) {
		for from := 0; from < len(items); {
			to := from + 1
			for to < len(items) && key(&items[to]) == key(&items[from]) {
				to++
			}
			if !yield(items[from:to]) {
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
	details   db.Details // read
	// rotated has peaks of rotated pairs by role and the record's id; damaged are
	// the records of those whose peaks could not be computed.
	rotated map[string]map[int64]db.Peaks
	damaged map[int64]bool
	// unsolved are the components whose spectra the generation lacks, and why they are left
	// out.
	unsolved map[componentKey]string
}

// findUnsolved notes what a run that was stopped, or that served another recipe, has
// stored and not computed by the published one, and on what that cannot be carried out.
func (p *picker) findUnsolved(ctx context.Context, snapshot *db.Snapshot) error {
	found, err := snapshot.Unsolved(ctx)
	if err != nil || len(found) == 0 {
		return err
	}
	p.unsolved = map[componentKey]string{}
	uncomputed := fmt.Sprintf("not computed by recipe %s: run ingest --recipe with it", snapshot.Generation.Recipe.Name)
	for _, u := range found {
		reason := uncomputed
		if u.Failure != "" {
			reason = errUnconditioned.Error()
		}
		p.unsolved[componentKey{u.RecordID, u.Role}] = reason
	}
	return nil
}

// unsolvedBy is the reason why a component of the motion has no spectra, "" where all have.
func (p *picker) unsolvedBy(m *motion) string {
	for _, c := range m.members {
		if reason := p.unsolved[componentKey{c.RecordID, c.Role}]; reason != "" {
			return reason
		}
	}
	return ""
}

// take looks at the components of one record. A record counts once as unmet if
// none of its motions meets the expression, and once for every reason that
// leaves a motion of it out. The expression is asked first, so that reasons
// count only what the question is about.
func (p *picker) take(components []db.HeldComponent) error {
	p.held++
	if _, isIn := p.selection.Scope.ask(components[0].Record); !isIn {
		p.outside++
		return nil
	}
	candidates, lacking := p.candidatesOf(components)
	unmet := len(candidates) > 0
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
	for _, r := range reasons {
		p.leftOut[r]++
	}
	return nil
}

// judge says whether a motion is taken, or why it is left out.
func (p *picker) judge(m *motion, lacking string) (reason string, met bool, err error) {
	unknown, met, err := p.ask(m)
	siting := m.members[0].Record.Siting
	flag, unsolved := p.selection.Screen.screened(m), p.unsolvedBy(m)
	unbalanced := p.selection.Balance.lacking(m.members[0].Record)
	switch {
	case err != nil || !met:
		return "", false, err
	case !p.sitings[siting]:
		return "siting " + siting, false, nil
	case lacking != "":
		return lacking, false, nil
	case unsolved != "":
		return unsolved, false, nil
	case !p.selection.IncludeUnknownDirections && m.hasUnknownDirection():
		return reasonUnknownDirection, false, nil
	case flag != "":
		return "screened out: " + flag, false, nil
	case p.details&db.DetailPeaks != 0 && m.hasDamagedPeaks():
		return reasonDamaged, false, nil
	case unknown != "":
		return unknown + " unknown", false, nil
	case unbalanced != "":
		return unbalanced, false, nil
	}
	return "", true, nil
}

// reasonUnknownDirection is of components that may be horizontal or vertical.
const reasonUnknownDirection = "direction unknown"

func (m *motion) hasUnknownDirection() bool {
	return slices.ContainsFunc(m.members, func(c *db.HeldComponent) bool { return c.Axis == db.AxisUnknown })
}

func (m *motion) hasDamagedPeaks() bool {
	if m.isRotated() {
		return m.rotated != nil && m.rotated.AreDamaged()
	}
	return slices.ContainsFunc(m.members, func(c *db.HeldComponent) bool { return c.AreDamaged() })
}

// ask asks the scope and the expression of a motion. Where that lacks what they need, it
// counts as met.
func (p *picker) ask(m *motion) (unknown string, met bool, err error) {
	lacking, isIn := p.selection.Scope.ask(m.members[0].Record)
	if !isIn {
		return "", false, nil
	}
	if unknown, met, err = p.askExpression(m); unknown == "" {
		unknown = lacking
	}
	return unknown, met, err
}

// askExpression asks the expression of a motion. Where that lacks a number which the
// expression uses, it counts as met; but where peaks of a rotated pair are all that
// is lacking, only if it is met with some peaks.
func (p *picker) askExpression(m *motion) (unknown string, met bool, err error) {
	if p.condition == nil {
		return "", true, nil
	}
	a := m.attributes()
	switch unknown = p.condition.unknown(&a); {
	case unknown == "":
		met, err = p.condition.met(&a)
	case isPeak(unknown) && m.isRotated():
		met, err = p.condition.canBeMet(&a)
	default:
		met = true
	}
	return unknown, met, err
}

// hintOf says what to ask where the expression asks a pair for what only one
// component has.
func (p *picker) hintOf() string {
	const instead = ": ask for h1, h2, v or each instead"
	switch {
	case !p.selection.Component.IsPair():
		return ""
	case p.condition.uses("component"):
		return fmt.Sprintf("the expression sees the component %q", p.selection.Component) + instead
	case p.condition.uses("azimuth_deg"):
		return "azimuth_deg of a pair is unknown" + instead
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
