package pipeline

import (
	"cmp"
	"math"
	"regexp"
	"slices"
	"strings"
	"time"

	"swaybook/db"
)

// The differences up to which two statements of an earthquake are taken to speak
// of one. Networks locate the same earthquake some seconds and some tens of
// kilometres apart, and scales of magnitude differ by some tenths and more.
//
// No source defines them; they are common practice.
const (
	originTolerance    = 10 * time.Second
	placeToleranceKM   = 50
	magnitudeTolerance = 1.0
	// aloneTolerance is that of the origin time where nothing else can be compared,
	// minuteTolerance that where one is stated to the minute, as old headers do, and
	// the places can be.
	aloneTolerance  = 2 * time.Second
	minuteTolerance = time.Minute
)

// statedEvent is an event by its own statements.
type statedEvent struct {
	db.EventKey
	db.Event
	identifiers []string // "scheme:code"
}

// difference measures how far apart two events are stated, 1 being the most at
// which they may be the same in each of time, place and magnitude. same is false
// beyond that, and where too little is stated to tell.
func difference(a, b *statedEvent) (d float64, same bool) {
	for _, scheme := range a.identifiers {
		if slices.Contains(b.identifiers, scheme) {
			return 0, true
		}
	}
	if toldApart(a.identifiers, b.identifiers) || a.Origin.IsZero() || b.Origin.IsZero() {
		return 0, false
	}
	apart, tolerance, compared := a.Origin.Sub(b.Origin).Abs(), originTolerance, false
	placed := a.LatitudeDeg != nil && b.LatitudeDeg != nil
	if placed && (isWholeMinute(a.Origin) || isWholeMinute(b.Origin)) {
		tolerance = minuteTolerance
	}
	d = float64(apart) / float64(tolerance)
	if placed {
		d, compared = max(d, epicentralKM(*a.LatitudeDeg, *a.LongitudeDeg, *b.LatitudeDeg, *b.LongitudeDeg)/placeToleranceKM), true
	}
	if a.Magnitude != nil && b.Magnitude != nil {
		d, compared = max(d, math.Abs(*a.Magnitude-*b.Magnitude)/magnitudeTolerance), true
	}
	return d, d <= 1 && (compared || apart <= aloneTolerance)
}

func isWholeMinute(at time.Time) bool { return at.Equal(at.Truncate(time.Minute)) }

// contradict reports whether two statements of one earthquake cannot be of one.
func contradict(a, b *statedEvent) bool {
	if a.LatitudeDeg != nil && b.LatitudeDeg != nil &&
		epicentralKM(*a.LatitudeDeg, *a.LongitudeDeg, *b.LatitudeDeg, *b.LongitudeDeg) > placeToleranceKM {
		return true
	}
	return a.Magnitude != nil && b.Magnitude != nil && math.Abs(*a.Magnitude-*b.Magnitude) > magnitudeTolerance
}

// isNamed reports whether an event's code is somebody's and not made of its time.
func (e *statedEvent) isNamed() bool { return !timeCode.MatchString(e.EventKey.Code) }

// timeCode is an event's code that ingest.EventCode makes of a time.
var timeCode = regexp.MustCompile(`^\d{8}T\d{6}(-\d+)?$`)

// toldApart reports whether one scheme of identifiers has a code for each, and
// not the same.
func toldApart(a, b []string) bool {
	for _, x := range a {
		scheme, _, _ := strings.Cut(x, ":")
		for _, y := range b {
			if strings.HasPrefix(y, scheme+":") {
				return true // equal ones have been seen to before
			}
		}
	}
	return false
}

// associate returns for each event the position of the one that stands for it,
// its own where that is itself. Which one does depends on the events alone and not
// on their order: those with a code of somebody's come before those with one made of
// their time, those with an identifier before those without, then the earlier before
// the later; each joins the nearest of those before it that stands for itself.
func associate(events []statedEvent) []int {
	order := make([]int, len(events))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(i, j int) int {
		a, b := &events[i], &events[j]
		return cmp.Or(compareBool(a.isNamed(), b.isNamed()), cmp.Compare(min(1, len(b.identifiers)), min(1, len(a.identifiers))), a.Origin.Compare(b.Origin), cmp.Compare(a.EventKey.Code, b.EventKey.Code))
	})
	stands := make([]int, len(events))
	var primaries []int
	for _, i := range order {
		stands[i] = i
		nearest := math.Inf(1)
		for _, p := range primaries {
			if d, same := difference(&events[p], &events[i]); same && d < nearest {
				stands[i], nearest = p, d
			}
		}
		if stands[i] == i {
			primaries = append(primaries, i)
		}
	}
	return stands
}

// compareBool orders true before false.
func compareBool(a, b bool) int {
	switch {
	case a == b:
		return 0
	case a:
		return -1
	}
	return 1
}
