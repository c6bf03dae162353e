package query

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"

	"swaybook/db"
	"swaybook/pipeline/geodesy"
)

// Scope bounds a selection in space and time, which an expression cannot. The zero Scope
// takes everything.
type Scope struct {
	Near *Near // nil: stations anywhere
	// Since and Until bound the time of the event, or of the record's start where that is
	// unknown: from Since on, before Until. Zero times are open.
	Since, Until time.Time
	// Event is an event's code, that by which a record came too, or EventLatest.
	Event string
}

// EventLatest stands for the last event of the motions that everything else takes.
const EventLatest = "latest"

// Near takes the records of stations within a distance of a point.
type Near struct {
	LatitudeDeg, LongitudeDeg, RadiusKM float64
}

// ParseNear reads "LATITUDE,LONGITUDE,KM", degrees positive north and east. The empty
// text gives nil.
func ParseNear(text string) (*Near, error) {
	if strings.TrimSpace(text) == "" {
		return nil, nil
	}
	parts := strings.Split(text, ",")
	if len(parts) != 3 {
		return nil, usage("near", "%q is not LATITUDE,LONGITUDE,KM, for example 38.2,21.7,50", text)
	}
	var values [3]float64
	for i, part := range parts {
		x, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil {
			return nil, usage("near", "%q is not a number", strings.TrimSpace(part))
		}
		values[i] = x
	}
	n := &Near{values[0], values[1], values[2]}
	return n, n.validate()
}

func (n *Near) validate() error {
	switch {
	case !(math.Abs(n.LatitudeDeg) <= 90):
		return usage("near", "the latitude %v is not within ±90 degrees", n.LatitudeDeg)
	case !(math.Abs(n.LongitudeDeg) <= 360):
		return usage("near", "the longitude %v is not within ±360 degrees", n.LongitudeDeg)
	case !(n.RadiusKM > 0) || math.IsInf(n.RadiusKM, 1):
		return usage("near", "the distance %v km is not positive and finite", n.RadiusKM)
	}
	return nil
}

// has reports whether the station is within the distance, and whether its position is
// known and possible.
func (n *Near) has(s *db.Station) (isIn, known bool) {
	if s == nil || s.LatitudeDeg == nil || s.LongitudeDeg == nil {
		return false, false
	}
	line, err := geodesy.Inverse(n.LatitudeDeg, n.LongitudeDeg, *s.LatitudeDeg, *s.LongitudeDeg)
	return line.LengthM <= 1000*n.RadiusKM, err == nil
}

// dateForms are the forms of a date and the end of what each names.
var dateForms = []struct {
	layout string
	end    func(time.Time) time.Time
}{
	{"2006", func(t time.Time) time.Time { return t.AddDate(1, 0, 0) }},
	{"2006-01", func(t time.Time) time.Time { return t.AddDate(0, 1, 0) }},
	{time.DateOnly, func(t time.Time) time.Time { return t.AddDate(0, 0, 1) }},
	{"2006-01-02T15:04", func(t time.Time) time.Time { return t.Add(time.Minute) }},
	{"2006-01-02T15:04:05", func(t time.Time) time.Time { return t.Add(time.Second) }},
	{time.RFC3339, func(t time.Time) time.Time { return t.Add(time.Second) }},
}

// ParseSince reads the begin of a year, month, day, minute or second in UTC: "2019",
// "2019-07", "2019-07-06", "2019-07-06T03:19" or RFC 3339. The empty text gives the zero
// time.
func ParseSince(text string) (time.Time, error) {
	begin, _, err := parseDate("since", text)
	return begin, err
}

// ParseUntil reads what ParseSince does and returns the end of it, which is no longer
// meant: the end of 2019 for "2019".
func ParseUntil(text string) (time.Time, error) {
	_, end, err := parseDate("until", text)
	return end, err
}

func parseDate(what, text string) (begin, end time.Time, err error) {
	text = strings.TrimSpace(text)
	if text == "" {
		return begin, end, nil
	}
	for _, form := range dateForms {
		if begin, err := time.Parse(form.layout, text); err == nil {
			return begin.UTC(), form.end(begin.UTC()), nil
		}
	}
	return begin, end, usage(what, "%q is no date; write 2019, 2019-07, 2019-07-06 or 2019-07-06T03:19:53Z (UTC)", text)
}

func (s *Scope) validate() error {
	if !s.Since.IsZero() && !s.Until.IsZero() && !s.Since.Before(s.Until) {
		return usage("until", "nothing lies between %s and %s", s.Since.Format(time.RFC3339), s.Until.Format(time.RFC3339))
	}
	if s.Near != nil {
		return s.Near.validate()
	}
	return nil
}

// details are what asking needs of components.
func (s *Scope) details() db.Details {
	if s.Near != nil || s.isTimed() {
		return db.DetailRecord
	}
	return 0
}

func (s *Scope) isTimed() bool { return !s.Since.IsZero() || !s.Until.IsZero() }

// ask reports whether the record is inside, or what would have to be known for that. One
// that is outside whatever that may be is outside.
func (s *Scope) ask(r *db.Record) (unknown string, isIn bool) {
	if s.Event != "" && (r.Event == nil || r.Event.Code != s.Event && r.Event.OwnCode != s.Event) {
		return "", false
	}
	if s.isTimed() {
		switch t := timeOf(r); {
		case t.IsZero():
			unknown = "event time"
		case t.Before(s.Since) || !s.Until.IsZero() && !t.Before(s.Until):
			return "", false
		}
	}
	if s.Near != nil {
		switch isNear, known := s.Near.has(r.Station); {
		case !known:
			unknown = "station position"
		case !isNear:
			return "", false
		}
	}
	return unknown, true
}

// timeOf is that of the origin, or of the record's start where the origin is unknown.
func timeOf(r *db.Record) time.Time {
	if r.Event != nil && !r.Event.Origin.IsZero() {
		return r.Event.Origin.UTC()
	}
	return r.Start.UTC()
}

// latestOf is the last event of these motions, the first by code where several have the
// last time; "" where of none the time is known.
func latestOf(motions []motion) string {
	var latest *db.Event
	for i := range motions {
		e := motions[i].members[0].Record.Event
		if e == nil || e.Origin.IsZero() {
			continue
		}
		if latest == nil || e.Origin.After(latest.Origin) || e.Origin.Equal(latest.Origin) && e.Code < latest.Code {
			latest = e
		}
	}
	if latest == nil {
		return ""
	}
	return latest.Code
}

// words describe the scope for people, each part behind "; ".
func (s *Scope) words() string {
	var b strings.Builder
	if s.Near != nil {
		fmt.Fprintf(&b, "; stations within %s km of %s, %s", shortest(s.Near.RadiusKM), shortest(s.Near.LatitudeDeg), shortest(s.Near.LongitudeDeg))
	}
	if !s.Since.IsZero() {
		b.WriteString("; since " + s.Since.Format(time.RFC3339))
	}
	if !s.Until.IsZero() {
		b.WriteString("; before " + s.Until.Format(time.RFC3339))
	}
	if s.Event != "" {
		b.WriteString("; event " + s.Event)
	}
	return b.String()
}

// fields describe the scope in JSON, as far as it bounds anything.
func (s *Scope) fields() object {
	var o object
	if s.Near != nil {
		o = append(o, field{"near", object{{"latitude", s.Near.LatitudeDeg}, {"longitude", s.Near.LongitudeDeg}, {"km", s.Near.RadiusKM}}})
	}
	if !s.Since.IsZero() {
		o = append(o, field{"since", s.Since.Format(time.RFC3339)})
	}
	if !s.Until.IsZero() {
		o = append(o, field{"before", s.Until.Format(time.RFC3339)})
	}
	if s.Event != "" {
		o = append(o, field{"event", s.Event})
	}
	return o
}
