package fdsnxml

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
)

// ContradictionError says that epochs of one channel that cover one time say different
// things of it. It prints as the places, and each quantity with what they say of it in
// their order.
type ContradictionError struct {
	Places    string // of the epochs
	Differing []string
}

// Error returns "a.xml:12 and b.xml:12 say dip 0° / -90°; depth 0 m / 3 m".
func (e *ContradictionError) Error() string {
	return e.Places + " say " + strings.Join(e.Differing, "; ")
}

// statement is one thing that epochs may say of a channel.
type statement struct {
	name   string
	say    func(*Channel) string // "" for nothing
	take   func(to, from *Channel)
	differ func(a, b *Channel) bool // where both speak, by more than rounding
	// decides says that the samples are not known without it: epochs that differ in it
	// contradict each other. All else comes with a doubt.
	decides bool
}

// The differences within which epochs say the same, as documents round. That of positions
// is the one by which statements on a station are told apart elsewhere. Common practice.
const (
	shareAgreement  = 1e-3 // of sensitivities, gains and rates, relative
	angleAgreement  = 0.5  // degrees
	heightAgreement = 0.5  // m
	placeAgreement  = 0.1  // km
)

// kmPerDegree is the length of a degree on a sphere of 6371 km.
const kmPerDegree = 6371 * math.Pi / 180

// statements are what epochs must agree in, as far as they speak of it. Their own dates
// and the name of the site may differ.
var statements = []statement{
	{"sensitivity", sayResponse, func(to, from *Channel) { to.Sensitivity, to.Polynomial = from.Sensitivity, from.Polynomial }, differInResponse, true},
	{"position", sayPosition, func(to, from *Channel) { to.Latitude, to.Longitude = from.Latitude, from.Longitude }, func(a, b *Channel) bool {
		return !samePlace(a.Latitude, a.Longitude, b.Latitude, b.Longitude)
	}, true},
	ofNumber("elevation", " m", false, func(c *Channel) *Number { return &c.ElevationM }, func(a, b float64) bool { return apart(a, b, heightAgreement) }),
	// A depth is always stated; the schema demands it. So 0 may be none, and the deepest
	// is taken.
	{"depth", func(c *Channel) string { return quantity(c.DepthM, " m") }, func(to, from *Channel) { to.DepthM = max(to.DepthM, from.DepthM) },
		func(a, b *Channel) bool { return apart(a.DepthM, b.DepthM, heightAgreement) }, false},
	ofNumber("azimuth", "°", true, func(c *Channel) *Number { return &c.AzimuthDeg }, func(a, b float64) bool { return apart(math.Remainder(a-b, 360), 0, angleAgreement) }),
	ofNumber("dip", "°", true, func(c *Channel) *Number { return &c.DipDeg }, func(a, b float64) bool { return apart(a, b, angleAgreement) }),
	notZero("sample rate", " Hz", true, func(c *Channel) *float64 { return &c.RateHz }),
	notZero("gain of the stages", "", false, func(c *Channel) *float64 { return &c.StageGain }),
}

// apart reports whether two decimals differ by more than a limit.
func apart(a, b, limit float64) bool { return math.Abs(a-b) > limit*(1+1e-9) }

func apartInShare(a, b float64) bool { return apart(a, b, shareAgreement*math.Abs(a)) }

// samePlace reports whether two positions, all known, are one within what is rounded.
func samePlace(latitude, longitude, otherLatitude, otherLongitude Number) bool {
	north := latitude.Value - otherLatitude.Value
	east := math.Remainder(longitude.Value-otherLongitude.Value, 360) * math.Cos(latitude.Value*math.Pi/180)
	return !apart(math.Hypot(north, east)*kmPerDegree, 0, placeAgreement)
}

func differInResponse(a, b *Channel) bool {
	s, r := a.Sensitivity, b.Sensitivity
	return s.Value.Known != r.Value.Known || s.Value.Known &&
		(spelled(s.OutputUnit) != spelled(r.OutputUnit) || spelled(s.InputUnit) != spelled(r.InputUnit) || apartInShare(s.Value.Value, r.Value.Value))
}

// unitSpellings are the ways in which documents write one unit.
var unitSpellings = strings.NewReplacer("/s/s", "/s2", "/sec/sec", "/s2", "/sec", "/s", "**", "", "^", "", " ", "", "counts", "count")

func spelled(unit string) string { return unitSpellings.Replace(strings.ToLower(unit)) }

func sayResponse(c *Channel) string {
	s := c.Sensitivity
	switch {
	case s.Value.Known:
		return fmt.Sprintf("%s %s per %s", quantity(s.Value.Value, ""), strings.ToLower(s.OutputUnit), strings.ToLower(s.InputUnit))
	case c.Polynomial:
		return "a polynomial"
	}
	return ""
}

func sayPosition(c *Channel) string {
	if !c.Latitude.Known {
		return ""
	}
	return quantity(c.Latitude.Value, "°") + ", " + quantity(c.Longitude.Value, "°")
}

func ofNumber(name, unit string, decides bool, of func(*Channel) *Number, differ func(a, b float64) bool) statement {
	say := func(c *Channel) string {
		if n := of(c); n.Known {
			return quantity(n.Value, unit)
		}
		return ""
	}
	return statement{name, say, func(to, from *Channel) { *of(to) = *of(from) }, func(a, b *Channel) bool { return differ(of(a).Value, of(b).Value) }, decides}
}

func notZero(name, unit string, decides bool, of func(*Channel) *float64) statement {
	say := func(c *Channel) string {
		if v := *of(c); v != 0 {
			return quantity(v, unit)
		}
		return ""
	}
	return statement{name, say, func(to, from *Channel) { *of(to) = *of(from) }, func(a, b *Channel) bool { return apartInShare(*of(a), *of(b)) }, decides}
}

// quantity writes a number so that another one is written otherwise, but for the sign of
// zero.
func quantity(v float64, unit string) string { return fmt.Sprintf("%g%s", v+0, unit) }

// agree returns what the epochs say together: what one leaves out another may say, and of
// several values that are one within rounding the first is taken, in an order that is not
// that of the documents. Where two say different things in what decides about the samples
// the error is a *ContradictionError; in all else it is a doubt.
func agree(epochs []*Channel) (*Channel, error) {
	ordered := slices.SortedFunc(slices.Values(epochs), compareEpochs)
	one := *ordered[0]
	one.Path, one.Line = places(epochs), 0
	var differing, doubts []string
	for _, st := range statements {
		for _, c := range ordered {
			if st.say(c) != "" && (st.say(&one) == "" || st.name == "depth") {
				st.take(&one, c)
			}
		}
		said := make([]string, len(epochs))
		for i, c := range epochs {
			said[i] = st.say(c)
		}
		isOther := func(c *Channel) bool { return st.say(c) != "" && st.differ(&one, c) }
		switch text := st.name + " " + enumerate(said, " / ", " / "); {
		case !slices.ContainsFunc(epochs, isOther):
		case st.decides:
			differing = append(differing, text)
		default:
			doubts = append(doubts, text+" ("+st.say(&one)+" taken)")
		}
	}
	for _, c := range ordered {
		one.SiteName = cmp.Or(one.SiteName, c.SiteName)
	}
	if len(differing) > 0 {
		return nil, &ContradictionError{one.Path, differing}
	}
	if len(doubts) > 0 {
		one.Doubts = one.Path + " say " + strings.Join(doubts, "; ")
	}
	return &one, nil
}

// compareEpochs puts the epoch that begins later first, then orders by what is said.
func compareEpochs(a, b *Channel) int {
	return cmp.Or(
		b.Start.Compare(a.Start), a.End.Compare(b.End),
		compareNumbers(a.Sensitivity.Value, b.Sensitivity.Value), compareNumbers(a.Latitude, b.Latitude), compareNumbers(a.Longitude, b.Longitude),
		compareNumbers(a.ElevationM, b.ElevationM), compareNumbers(a.AzimuthDeg, b.AzimuthDeg), compareNumbers(a.DipDeg, b.DipDeg),
		cmp.Compare(a.RateHz, b.RateHz), cmp.Compare(a.StageGain, b.StageGain), cmp.Compare(a.SiteName, b.SiteName),
	)
}

// compareNumbers puts what is known first.
func compareNumbers(a, b Number) int {
	if a.Known != b.Known {
		if a.Known {
			return -1
		}
		return 1
	}
	return cmp.Compare(a.Value, b.Value)
}

// places names the elements of epochs.
func places(epochs []*Channel) string {
	var at []string
	for _, c := range epochs {
		at = append(at, c.Place())
	}
	return enumerate(at, ", ", " and ")
}

// enumerate joins the first of several texts; one without a letter is "none".
func enumerate(texts []string, comma, last string) string {
	var b strings.Builder
	for i, s := range texts {
		switch {
		case i == maxEpochs:
			fmt.Fprintf(&b, "%sand %d more", comma, len(texts)-i)
			return b.String()
		case i > 0 && i == len(texts)-1:
			b.WriteString(last)
		case i > 0:
			b.WriteString(comma)
		}
		b.WriteString(cmp.Or(s, "none"))
	}
	return b.String()
}
