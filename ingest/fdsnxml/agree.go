package fdsnxml

import (
	"cmp"
	"fmt"
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
	name string
	say  func(*Channel) string // "" for nothing
	take func(to, from *Channel)
}

// statements are what epochs must agree in, as far as they speak of it. Their own dates
// and the name of the site may differ.
var statements = []statement{
	{"sensitivity", sayResponse, func(to, from *Channel) { to.Sensitivity, to.Polynomial = from.Sensitivity, from.Polynomial }},
	{"position", sayPosition, func(to, from *Channel) { to.Latitude, to.Longitude = from.Latitude, from.Longitude }},
	ofNumber("elevation", " m", func(c *Channel) *Number { return &c.ElevationM }),
	// A depth is always stated; the schema demands it.
	{"depth", func(c *Channel) string { return quantity(c.DepthM, " m") }, func(_, _ *Channel) {}},
	ofNumber("azimuth", "°", func(c *Channel) *Number { return &c.AzimuthDeg }),
	ofNumber("dip", "°", func(c *Channel) *Number { return &c.DipDeg }),
	notZero("sample rate", " Hz", func(c *Channel) *float64 { return &c.RateHz }),
	notZero("gain of the stages", "", func(c *Channel) *float64 { return &c.StageGain }),
}

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

func ofNumber(name, unit string, of func(*Channel) *Number) statement {
	say := func(c *Channel) string {
		if n := of(c); n.Known {
			return quantity(n.Value, unit)
		}
		return ""
	}
	return statement{name, say, func(to, from *Channel) { *of(to) = *of(from) }}
}

func notZero(name, unit string, of func(*Channel) *float64) statement {
	say := func(c *Channel) string {
		if v := *of(c); v != 0 {
			return quantity(v, unit)
		}
		return ""
	}
	return statement{name, say, func(to, from *Channel) { *of(to) = *of(from) }}
}

// quantity writes a number so that another one is written otherwise, but for the sign of
// zero.
func quantity(v float64, unit string) string { return fmt.Sprintf("%g%s", v+0, unit) }

// agree returns what the epochs say together: what one leaves out another may say. Where
// two say different things the error is a *ContradictionError.
func agree(epochs []*Channel) (*Channel, error) {
	one := *epochs[0]
	one.Path, one.Line = places(epochs), 0
	var differing []string
	for _, st := range statements {
		said := make([]string, len(epochs))
		for i, c := range epochs {
			if said[i] = st.say(c); said[i] != "" && st.say(&one) == "" {
				st.take(&one, c)
			}
		}
		if own := st.say(&one); slices.ContainsFunc(said, func(s string) bool { return s != "" && s != own }) {
			differing = append(differing, st.name+" "+enumerate(said, " / ", " / "))
		}
	}
	for _, c := range epochs {
		one.SiteName = cmp.Or(one.SiteName, c.SiteName)
	}
	if len(differing) > 0 {
		return nil, &ContradictionError{one.Path, differing}
	}
	return &one, nil
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
