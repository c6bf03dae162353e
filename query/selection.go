package query

import (
	"slices"
	"strings"

	"swaybook/db"
)

// Component names what one motion of a selection is made of.
type Component string

// Each horizontal component on its own, one role only, or a horizontal pair as
// one: the median or the maximum over all directions, or at every period the
// geometric mean of both ordinates or the larger one. Recorded takes every stored
// component, all takes what is stored of the pairs over all directions too;
// statistics accept neither.
const (
	ComponentEach     Component = "each"
	ComponentH1       Component = "h1"
	ComponentH2       Component = "h2"
	ComponentV        Component = "v"
	ComponentRotD50   Component = db.RoleRotD50
	ComponentRotD100  Component = db.RoleRotD100
	ComponentGeomean  Component = "geomean"
	ComponentLarger   Component = "larger"
	ComponentRecorded Component = "recorded"
	ComponentAll      Component = "all"
)

var (
	statisticsComponents = []Component{ComponentRotD50, ComponentRotD100, ComponentGeomean, ComponentLarger, ComponentEach, ComponentH1, ComponentH2, ComponentV}
	storedComponents     = []Component{ComponentAll, ComponentRecorded, ComponentEach, ComponentH1, ComponentH2, ComponentV, ComponentRotD50, ComponentRotD100}
)

// ParseComponent reads a component for statistics. The empty text gives
// ComponentRotD50.
func ParseComponent(text string) (Component, error) {
	if text == "" {
		return ComponentRotD50, nil
	}
	return Component(text), checkComponent(Component(text), statisticsComponents)
}

// ParseStoredComponent reads a component for lists and export. The empty text
// gives "", which stands for the question's default.
func ParseStoredComponent(text string) (Component, error) {
	if text == "" {
		return "", nil
	}
	return Component(text), checkComponent(Component(text), storedComponents)
}

func checkComponent(c Component, accepted []Component) error {
	if slices.Contains(accepted, c) {
		return nil
	}
	return usage("component", "unknown component %q; accepted here: %s", string(c), joinWords(accepted))
}

// IsPair reports whether two horizontal components make one motion.
func (c Component) IsPair() bool {
	return c == ComponentGeomean || c == ComponentLarger || c.IsRotated()
}

// IsRotated reports whether a motion is a horizontal pair over all directions.
func (c Component) IsRotated() bool { return c == ComponentRotD50 || c == ComponentRotD100 }

// inWords explains the names that need it.
func (c Component) inWords() string {
	switch c {
	case ComponentRotD50:
		return "rotd50 (median over all directions)"
	case ComponentRotD100:
		return "rotd100 (maximum over all directions)"
	}
	return string(c)
}

// Siting says which sitings of instruments a selection takes: "all", or a list
// separated by commas of free-field, ground, structure, borehole and unknown.
// In a list, "ground" stands for what is taken as ground motion: free-field,
// ground and unknown.
type Siting string

// The default for statistics and the default for lists and export.
const (
	SitingGround Siting = "ground"
	SitingAll    Siting = "all"
)

// sitingWord is a word of a Siting and the stored sitings that it takes.
type sitingWord struct {
	word  Siting
	takes []string
}

var sitings = []sitingWord{
	{SitingGround, []string{"free-field", "ground", "unknown"}},
	{"free-field", []string{"free-field"}},
	{"structure", []string{"structure"}},
	{"borehole", []string{"borehole"}},
	{"unknown", []string{"unknown"}},
	{SitingAll, []string{"free-field", "ground", "structure", "borehole", "unknown"}},
}

// ParseSiting reads a list of sitings for statistics. The empty text gives
// SitingGround.
func ParseSiting(text string) (Siting, error) { return parseSiting(text, SitingGround) }

// ParseStoredSiting reads a list of sitings for lists and export. The empty
// text gives SitingAll.
func ParseStoredSiting(text string) (Siting, error) { return parseSiting(text, SitingAll) }

func parseSiting(text string, empty Siting) (Siting, error) {
	if strings.TrimSpace(text) == "" {
		return empty, nil
	}
	var words []string
	for word := range strings.SplitSeq(text, ",") {
		words = append(words, strings.TrimSpace(word))
	}
	s := Siting(strings.Join(words, ","))
	_, err := s.taken()
	return s, err
}

// taken returns the set of sitings that s takes.
func (s Siting) taken() (map[string]bool, error) {
	out := map[string]bool{}
	for word := range strings.SplitSeq(string(s), ",") {
		at := slices.IndexFunc(sitings, func(v sitingWord) bool { return string(v.word) == word })
		if at < 0 {
			return nil, usage("siting", "unknown siting %q; accepted: %s", word, sitingWords())
		}
		for _, siting := range sitings[at].takes {
			out[siting] = true
		}
	}
	return out, nil
}

func sitingWords() string {
	var words []Siting
	for _, s := range sitings {
		words = append(words, s.word)
	}
	return joinWords(words)
}

func joinWords[T ~string](words []T) string {
	texts := make([]string, len(words))
	for i, w := range words {
		texts[i] = string(w)
	}
	return strings.Join(texts, ", ")
}

// Selection says which motions a question is about. An empty component or
// siting stands for the question's default.
//
// Where is a boolean expression over the attributes that WhereAttributes lists,
// for example magnitude >= 6 and distance_km < 50. A motion that lacks a number
// which the expression uses is left out and counted, even where another part of
// the expression would decide; an unknown string is "". Attributes are the
// component's own, those of a pair are combined: peaks as the ordinates are, of
// all else the less favourable, and the azimuth of a pair is unknown. The peaks of
// a pair over all directions are those of the motion itself, taken direction by
// direction: stored, or computed from the samples where they are not.
type Selection struct {
	// AsOf is the number of a run: what was published when it had ended, or what it held
	// back, is asked. 0 asks what is published.
	AsOf int64
	// AnySolver takes what is stored as any solver computed it. What is not, this program
	// computes.
	AnySolver bool
	Where     string // "" takes all
	Scope     Scope
	Component Component
	Siting    Siting
	// IncludeDuplicates takes motions too that the store holds in a better version;
	// lists and export do always.
	IncludeDuplicates bool
	// IncludeUnknownDirections takes components too of which nobody says whether they
	// are horizontal; lists and export do always.
	IncludeUnknownDirections bool
	// IgnoreUsableBand counts ordinates too at periods at which the motion's filters and
	// sampling leave nothing to believe; lists and export do always.
	IgnoreUsableBand bool
	// Screen leaves out motions for what was found of them; ScreenNormal by default, in
	// lists and export ScreenNone.
	Screen Screen
	// Balance weighs motions; lists and export do not. BalanceNone by default.
	Balance Balance
}

// ofEverything is s for lists and export, which show what statistics leave out.
func (s Selection) ofEverything() Selection {
	s.IncludeDuplicates, s.IncludeUnknownDirections, s.IgnoreUsableBand = true, true, true
	s.Screen, s.Balance = ScreenNone, BalanceNone
	return s
}

// withDefaults fills in what is empty and checks the rest.
func (s Selection) withDefaults(component Component, siting Siting, accepted []Component) (Selection, error) {
	if s.Component == "" {
		s.Component = component
	}
	if s.Siting == "" {
		s.Siting = siting
	}
	if err := checkComponent(s.Component, accepted); err != nil {
		return s, err
	}
	if err := s.Scope.validate(); err != nil {
		return s, err
	}
	var err error
	if s.Screen, err = ParseScreen(string(s.Screen)); err != nil {
		return s, err
	}
	if s.Balance, err = ParseBalance(string(s.Balance)); err != nil {
		return s, err
	}
	_, err = s.Siting.taken()
	return s, err
}

// SelectionReport says what a selection took and what it left out.
type SelectionReport struct {
	Where     string
	Scope     Scope // with the event's code in place of EventLatest
	Component Component
	Siting    Siting
	Recipe    string // by which the components are conditioned
	Screen    Screen
	Balance   Balance
	Method    Method
	Records   int // that contribute
	Spectra   int // that contribute
	Events    int // known events that contribute
	LeftOut   []LeftOut
	Notes     []string

	motions []motion // that contribute
}
