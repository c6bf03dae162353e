package query

import (
	"slices"

	"swaybook/db"
)

// Screen says which findings leave a motion out of statistics.
type Screen string

// The screens.
const (
	// ScreenNone leaves nothing out.
	ScreenNone Screen = "none"
	// ScreenNormal leaves out what is no record of the motion: clipped, lost_data,
	// duplicated, low_signal.
	ScreenNormal Screen = "normal"
	// ScreenStrict leaves out besides what is a doubtful or partial one: spikes, which may
	// be the motion's own where sampling is coarse, peak_mismatch, irregular_sampling,
	// late_start, early_end, several_events, and of the motion behind the recipe offset,
	// baseline_step, drift, final_velocity and final_displacement.
	ScreenStrict Screen = "strict"
)

// ParseScreen reads the name of a screen. The empty text gives ScreenNormal.
func ParseScreen(text string) (Screen, error) {
	s := Screen(text)
	switch s {
	case "":
		return ScreenNormal, nil
	case ScreenNone, ScreenNormal, ScreenStrict:
		return s, nil
	}
	return s, usage("screen", "unknown screen %q; accepted: strict, normal, none", text)
}

// qualityFlags is what an expression sees of a motion's findings: of a pair those of both.
type qualityFlags struct {
	Clipped           bool `expr:"clipped"`
	Spikes            bool `expr:"spikes"`
	LostData          bool `expr:"lost_data"`
	Duplicated        bool `expr:"duplicated"`
	LowSignal         bool `expr:"low_signal"`
	PeakMismatch      bool `expr:"peak_mismatch"`
	Irregular         bool `expr:"irregular_sampling"`
	LateStart         bool `expr:"late_start"`
	EarlyEnd          bool `expr:"early_end"`
	SeveralEvents     bool `expr:"several_events"`
	Offset            bool `expr:"offset"`
	BaselineStep      bool `expr:"baseline_step"`
	Drift             bool `expr:"drift"`
	FinalVelocity     bool `expr:"final_velocity"`
	FinalDisplacement bool `expr:"final_displacement"`
	NoPreEvent        bool `expr:"no_pre_event"`
}

// kind is a kind of finding.
type kind struct {
	name   string
	of     func(*qualityFlags) *bool // where an expression sees it
	screen Screen                    // the mildest that leaves it out, "" for none
	unit   *string                   // of the numbers of a finding, nil for ratios and counts
	// isLeft says that it counts of the motion as the recipe left it, which is what the
	// spectrum is of.
	isLeft bool
}

// seconds is the unit of findings that are about times.
var seconds = new("s")

// flags are all of them, in the order in which they count as reasons.
var flags = []kind{
	{"clipped", func(q *qualityFlags) *bool { return &q.Clipped }, ScreenNormal, nil, false},
	{"lost_data", func(q *qualityFlags) *bool { return &q.LostData }, ScreenNormal, seconds, false},
	{"duplicated", func(q *qualityFlags) *bool { return &q.Duplicated }, ScreenNormal, nil, false},
	{"low_signal", func(q *qualityFlags) *bool { return &q.LowSignal }, ScreenNormal, nil, false},
	{"spikes", func(q *qualityFlags) *bool { return &q.Spikes }, ScreenStrict, nil, false},
	{"peak_mismatch", func(q *qualityFlags) *bool { return &q.PeakMismatch }, ScreenStrict, nil, false},
	{"irregular_sampling", func(q *qualityFlags) *bool { return &q.Irregular }, ScreenStrict, seconds, false},
	{"late_start", func(q *qualityFlags) *bool { return &q.LateStart }, ScreenStrict, nil, false},
	{"early_end", func(q *qualityFlags) *bool { return &q.EarlyEnd }, ScreenStrict, nil, false},
	{"several_events", func(q *qualityFlags) *bool { return &q.SeveralEvents }, ScreenStrict, seconds, false},
	{"offset", func(q *qualityFlags) *bool { return &q.Offset }, ScreenStrict, nil, true},
	{"baseline_step", func(q *qualityFlags) *bool { return &q.BaselineStep }, ScreenStrict, nil, true},
	{"drift", func(q *qualityFlags) *bool { return &q.Drift }, ScreenStrict, nil, true},
	{"final_velocity", func(q *qualityFlags) *bool { return &q.FinalVelocity }, ScreenStrict, nil, true},
	{"final_displacement", func(q *qualityFlags) *bool { return &q.FinalDisplacement }, ScreenStrict, nil, true},
	{"no_pre_event", func(q *qualityFlags) *bool { return &q.NoPreEvent }, "", seconds, false},
}

// unitOfFlag is the unit of what is measured where a flag is raised, nil for ratios and counts.
func unitOfFlag(flag string) *string {
	for _, known := range flags {
		if known.name == flag {
			return known.unit
		}
	}
	return nil
}

// qualityOf is what counts of the components' findings.
func qualityOf(components ...*db.HeldComponent) (q qualityFlags) {
	for _, known := range flags {
		*known.of(&q) = slices.ContainsFunc(components, known.isFoundIn)
	}
	return q
}

// isFoundIn reports whether the component has such a finding that counts. One that was
// left as it was delivered has no other motion.
func (k kind) isFoundIn(c *db.HeldComponent) bool {
	found := c.Findings
	if k.isLeft && c.Conditioning != nil {
		found = c.Conditioning.Findings
	}
	return slices.ContainsFunc(found, func(f db.Finding) bool { return f.Flag == k.name })
}

// includes reports whether the screen leaves motions out for a kind of finding.
func (s Screen) includes(k kind) bool {
	return s != ScreenNone && (k.screen == ScreenNormal || k.screen == s)
}

// flags are those for which the screen leaves motions out.
func (s Screen) flags() (names []string) {
	for _, known := range flags {
		if s.includes(known) {
			names = append(names, known.name)
		}
	}
	return names
}

// screened returns the finding for which the screen leaves the motion out, "" for none.
func (s Screen) screened(m *motion) string {
	for _, known := range flags {
		if s.includes(known) && slices.ContainsFunc(m.members, known.isFoundIn) {
			return known.name
		}
	}
	return ""
}
