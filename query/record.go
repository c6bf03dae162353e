package query

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/ingest/tomlfile"
)

// RecordQuestion asks what is known of one record.
type RecordQuestion struct {
	AsOf      int64     // see Selection
	Code      string    // the record's
	Component Component // one of its roles; all that are stored where empty
	Figure    bool      // the answer has the traces and spectra of figures too
}

// RecordAnswer is what is known of one record.
type RecordAnswer struct {
	Code, Recipe string
	Rows         []RecordRow      // in the order of recordComponents
	Conditioned  []ConditionedRow // of the components among them
	Lacking      []LackingRow     // what is stored and cannot be shown
	Figure       *RecordFigure    // nil where not asked for
	motions      []motion         // of Rows
}

// ConditionedRow says what the spectra and measures of a component were computed of.
type ConditionedRow struct {
	Component     string
	IsConditioned bool // by the recipe; else the component is as it was delivered
	StepS         float64
	Samples       int
	LeadS         float64 // by how much it begins before the component's first sample
}

// LackingRow is a component of which nothing can be shown, and why.
type LackingRow struct{ Component, Reason string }

// recordComponents are what a record can have, in the order in which they are shown.
var recordComponents = []Component{ComponentH1, ComponentH2, ComponentV, ComponentRotD50, ComponentRotD100}

// ParseRecordComponent reads a component of a record. The empty text gives "", which stands
// for all that are stored.
func ParseRecordComponent(text string) (Component, error) {
	if text == "" {
		return "", nil
	}
	return Component(text), checkComponent(Component(text), recordComponents)
}

// Ask answers the question from one snapshot of the store. The error is a UsageError for a
// wrong question.
func (q RecordQuestion) Ask(ctx context.Context, store *db.Store) (*RecordAnswer, error) {
	if _, err := ParseRecordComponent(string(q.Component)); err != nil {
		return nil, err
	}
	if q.Code == "" {
		return nil, usage("record", "no code is given")
	}
	var answer *RecordAnswer
	err := view(ctx, store, &Selection{AsOf: q.AsOf}, func(snapshot *db.Snapshot) (err error) {
		answer, err = q.answer(ctx, snapshot)
		return err
	})
	return answer, err
}

func (q *RecordQuestion) answer(ctx context.Context, snapshot *db.Snapshot) (*RecordAnswer, error) {
	held, err := snapshot.Components(ctx, 0)
	if err != nil {
		return nil, err
	}
	id, roles, err := q.find(held)
	if err != nil {
		return nil, err
	}
	everything, err := Selection{Component: ComponentAll}.ofEverything().withDefaults(ComponentAll, SitingAll, storedComponents)
	if err != nil {
		return nil, err
	}
	picked, err := pick(ctx, snapshot, everything, db.AllDetails)
	if _, isEmpty := errors.AsType[*EmptyError](err); err != nil && !isEmpty {
		return nil, err
	}
	a := &RecordAnswer{Code: q.Code, Recipe: snapshot.Generation.Recipe.Name}
	for i := range picked.motions {
		if m := &picked.motions[i]; m.members[0].RecordID == id {
			a.motions = append(a.motions, *m)
		}
	}
	if a.Lacking, err = lacking(ctx, snapshot, id, roles, a.motions); err != nil {
		return nil, err
	}
	starts := startsOf(a.motions)
	if err := a.keep(q.Component); err != nil {
		return nil, err
	}
	for i := range a.motions {
		a.add(&a.motions[i])
	}
	if q.Figure {
		a.Figure, err = q.figure(ctx, snapshot, a, starts)
	}
	return a, err
}

// find looks for the record among the components held, with its roles.
func (q *RecordQuestion) find(held []db.HeldComponent) (id int64, roles []string, err error) {
	var codes []string
	for i := range held {
		c := &held[i]
		if len(codes) == 0 || codes[len(codes)-1] != c.Record.Code {
			codes = append(codes, c.Record.Code)
		}
		if c.Record.Code == q.Code {
			id, roles = c.RecordID, append(roles, c.Role)
		}
	}
	if roles == nil {
		return 0, nil, errors.New(unknownRecord(q.Code, codes))
	}
	return id, roles, nil
}

// unknownRecord says that there is no such record, and which there are like it: those that
// have the code in theirs, or else the nearest.
func unknownRecord(code string, codes []string) string {
	text := fmt.Sprintf("the store holds no record %q", code)
	const most = 3
	var like []string
	for _, c := range codes {
		if strings.Contains(strings.ToLower(c), strings.ToLower(code)) {
			like = append(like, c)
		}
	}
	if len(like) == 0 {
		if nearest := tomlfile.Nearest(code, codes, max(2, len(code)/4)); nearest != "" {
			like = []string{nearest}
		}
	}
	switch {
	case len(like) == 0:
		return text + "; query records lists those that there are"
	case len(like) > most:
		return text + "; " + strings.Join(like[:most], ", ") + fmt.Sprintf(" and %d more have that in their code", len(like)-most)
	}
	return text + "; did you mean " + strings.Join(like, " or ") + "?"
}

// lacking are the roles of the record that none of the motions has, and why.
func lacking(ctx context.Context, snapshot *db.Snapshot, id int64, roles []string, motions []motion) ([]LackingRow, error) {
	unsolved, err := snapshot.Unsolved(ctx)
	if err != nil {
		return nil, err
	}
	var out []LackingRow
	for _, role := range roles {
		if slices.ContainsFunc(motions, func(m motion) bool { return m.role == role }) {
			continue
		}
		row := LackingRow{role, reasonDamaged}
		for _, u := range unsolved {
			if u.RecordID == id && u.Role == role {
				row.Reason = cmp.Or(u.Failure, "not computed by recipe "+snapshot.Generation.Recipe.Name)
			}
		}
		out = append(out, row)
	}
	return out, nil
}

// keep puts the motions in order and keeps those of a component, all where it is empty. The
// error says that there is none.
func (a *RecordAnswer) keep(c Component) error {
	order := func(m motion) int { return slices.Index(recordComponents, Component(m.role)) }
	slices.SortFunc(a.motions, func(x, y motion) int { return cmp.Compare(order(x), order(y)) })
	var have []string
	kept := slices.DeleteFunc(slices.Clone(a.motions), func(m motion) bool {
		have = append(have, m.role)
		return c != "" && m.role != string(c)
	})
	a.motions = kept
	switch reason := a.lackingOf(string(c)); {
	case len(kept) > 0:
		return nil
	case reason != "":
		return fmt.Errorf("record %s, component %s: %s", a.Code, c, reason)
	case len(have) > 0:
		return fmt.Errorf("record %s has no component %s; it has %s", a.Code, c, strings.Join(have, ", "))
	}
	return fmt.Errorf("record %s, component %s: %s", a.Code, a.Lacking[0].Component, a.Lacking[0].Reason)
}

func (a *RecordAnswer) lackingOf(role string) string {
	for _, l := range a.Lacking {
		if l.Component == role {
			return l.Reason
		}
	}
	return ""
}

// add adds the rows of a motion.
func (a *RecordAnswer) add(m *motion) {
	a.Rows = append(a.Rows, rowOf(m))
	if m.isRotated() {
		return
	}
	c := m.members[0]
	row := ConditionedRow{Component: m.role, StepS: c.StepS, Samples: c.Samples}
	if k := c.Conditioning; k != nil {
		row.IsConditioned, row.StepS, row.Samples, row.LeadS = true, k.StepS, k.Samples, k.LeadS
	}
	a.Conditioned = append(a.Conditioned, row)
}

// startsOf are by how many seconds components begin after the first of them, by role: none
// where the time of any is unknown.
func startsOf(motions []motion) map[string]float64 {
	out := map[string]float64{}
	var first time.Time
	for i := range motions {
		switch start := motions[i].members[0].Start; {
		case motions[i].isRotated():
		case start.IsZero():
			return map[string]float64{}
		case first.IsZero() || start.Before(first):
			first = start
		}
	}
	for i := range motions {
		if c := motions[i].members[0]; !motions[i].isRotated() {
			out[c.Role] = c.Start.Sub(first).Seconds()
		}
	}
	return out
}
