package fdsnxml

import (
	"cmp"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"slices"
	"strings"
	"time"
)

// Event is one event with its preferred origin and magnitude.
type Event struct {
	PublicID            string // "" where not stated
	Code                string // the catalogue's own code, "" where not stated
	Name                string // the description: the place in words
	Origin              time.Time
	Latitude, Longitude float64 // degrees
	DepthM              Number
	Magnitude           Number
	MagnitudeType       string // Mw, ML …
	// Created is when this version of the event came about, or else its origin; zero
	// where not stated.
	Created time.Time
	// Withdrawn says that there was no such event, or nowhere. Nothing but PublicID,
	// Created and Line is set then.
	Withdrawn bool
	// Line is that of the event's start tag.
	Line int
	// Warnings say what had to be chosen.
	Warnings []string
}

// noEvents are the types of events of which there was none, or nowhere.
// They are how an event that was published before is withdrawn.
//
// Source: QuakeML 1.2, EventType (from memory; "not locatable" is of version 1.1).
var noEvents = []string{"not existing", "not locatable"}

// The elements of QuakeML that are read.
type (
	xmlEvent struct {
		PublicID     string         `xml:"publicID,attr"`
		Code         string         `xml:"eventid,attr"`
		Origin       string         `xml:"preferredOriginID"`
		Magnitude    string         `xml:"preferredMagnitudeID"`
		Type         string         `xml:"type"`
		Created      string         `xml:"creationInfo>creationTime"`
		Descriptions []xmlWords     `xml:"description"`
		Origins      []xmlOrigin    `xml:"origin"`
		Magnitudes   []xmlMagnitude `xml:"magnitude"`
	}
	xmlWords struct {
		Text string `xml:"text"`
		Type string `xml:"type"`
	}
	xmlOrigin struct {
		PublicID  string `xml:"publicID,attr"`
		Time      string `xml:"time>value"`
		Latitude  number `xml:"latitude>value"`
		Longitude number `xml:"longitude>value"`
		Depth     number `xml:"depth>value"`
		Mode      string `xml:"evaluationMode"`
		Created   string `xml:"creationInfo>creationTime"`
	}
	xmlMagnitude struct {
		PublicID string `xml:"publicID,attr"`
		Value    number `xml:"mag>value"`
		Type     string `xml:"type"`
	}
)

// ReadEvents reads a QuakeML document. Events that cannot be used are left out,
// and the notes say why; those that are withdrawn and have an identifier are noted too, and
// returned as such. An error is an *Error with the line, says that the document
// is too large, or is the context's.
func ReadEvents(ctx context.Context, data []byte) (events []Event, left []Note, err error) {
	d, err := open(ctx, data, eventRoot, eventNamespace)
	if err != nil {
		return nil, nil, err
	}
	err = d.children(func(e xml.StartElement) error {
		if e.Name.Local != "eventParameters" {
			return d.reader.Skip()
		}
		return d.children(func(e xml.StartElement) error {
			if e.Name.Local != "event" {
				return d.reader.Skip()
			}
			raw, line := xmlEvent{}, d.line()
			if err := d.reader.DecodeElement(&raw, &e); err != nil {
				return err
			}
			event, err := raw.event(line)
			if err != nil {
				left = append(left, leftOut(line, "event "+event.PublicID, err))
			}
			if err != nil && (!event.Withdrawn || event.PublicID == "") {
				return nil
			}
			events = append(events, event)
			return nil
		})
	})
	if err != nil {
		return nil, nil, err
	}
	return events, left, d.close()
}

func (raw *xmlEvent) event(line int) (e Event, err error) {
	e = Event{PublicID: strings.TrimSpace(raw.PublicID), Code: strings.TrimSpace(raw.Code), Name: raw.name(), Line: line}
	if kind := strings.TrimSpace(raw.Type); slices.Contains(noEvents, kind) {
		return raw.withdrawn(e), fmt.Errorf("its type is %q", kind)
	}
	o, err := raw.origin(&e)
	if err == nil {
		e.Created = created(raw.Created, o.Created)
		err = o.describe(&e)
	}
	if err == nil {
		err = raw.magnitude(&e)
	}
	return e, err
}

// withdrawn is the event of which there was none.
func (raw *xmlEvent) withdrawn(e Event) Event {
	texts := []string{raw.Created}
	if o, err := raw.origin(&e); err == nil {
		texts = append(texts, o.Created)
	}
	return Event{PublicID: e.PublicID, Created: created(texts...), Withdrawn: true, Line: e.Line}
}

// created is the first of the texts that is a time. Nothing else depends on it, so one
// that is none is no fault of the event.
func created(texts ...string) time.Time {
	for _, text := range texts {
		if at, err := instant(text); err == nil && !at.IsZero() {
			return at
		}
	}
	return time.Time{}
}

// name is the description that speaks of the place or the earthquake's name,
// else the first.
func (raw *xmlEvent) name() string {
	for _, kind := range []string{"earthquake name", "region name", "Flinn-Engdahl region", ""} {
		for _, d := range raw.Descriptions {
			if text := strings.TrimSpace(d.Text); text != "" && (kind == "" || strings.TrimSpace(d.Type) == kind) {
				return text
			}
		}
	}
	return ""
}

// origin returns the preferred origin. Where none is named and there are
// several, one that a person looked at comes before others, then the newest.
func (raw *xmlEvent) origin(e *Event) (*xmlOrigin, error) {
	if len(raw.Origins) == 0 {
		return nil, errors.New("no origin")
	}
	if want := strings.TrimSpace(raw.Origin); want != "" {
		for i := range raw.Origins {
			if strings.TrimSpace(raw.Origins[i].PublicID) == want {
				return &raw.Origins[i], nil
			}
		}
		e.Warnings = append(e.Warnings, "the preferred origin is not in the document")
	}
	if len(raw.Origins) == 1 {
		return &raw.Origins[0], nil
	}
	e.Warnings = append(e.Warnings, fmt.Sprintf("of %d origins none is preferred: the newest taken, manual ones first", len(raw.Origins)))
	newest := slices.MaxFunc(raw.Origins, func(a, b xmlOrigin) int {
		return cmp.Or(cmp.Compare(a.manual(), b.manual()), cmp.Compare(strings.TrimSpace(a.Created), strings.TrimSpace(b.Created)))
	})
	return &newest, nil
}

func (o *xmlOrigin) manual() int {
	if strings.TrimSpace(o.Mode) == "manual" {
		return 1
	}
	return 0
}

func (o *xmlOrigin) describe(e *Event) (err error) {
	if e.Origin, err = instant(o.Time); err != nil {
		return err
	}
	if e.Origin.IsZero() {
		return errors.New("its origin has no time")
	}
	if err := firstBad(o.Latitude, o.Longitude, o.Depth); err != nil {
		return err
	}
	if !o.Latitude.Known || !o.Longitude.Known {
		return errNoPosition
	}
	latitude, longitude, err := position(o.Latitude.Number, o.Longitude.Number)
	e.Latitude, e.Longitude, e.DepthM = latitude.Value, longitude.Value, o.Depth.Number
	return err
}

// magnitude takes the preferred one, else a moment magnitude, else the first.
func (raw *xmlEvent) magnitude(e *Event) error {
	for _, m := range raw.Magnitudes {
		if m.Value.bad != nil {
			return m.Value.bad
		}
	}
	known := slices.DeleteFunc(slices.Clone(raw.Magnitudes), func(m xmlMagnitude) bool { return !m.Value.Known })
	if len(known) == 0 {
		return nil
	}
	want := strings.TrimSpace(raw.Magnitude)
	at := slices.IndexFunc(known, func(m xmlMagnitude) bool { return want != "" && strings.TrimSpace(m.PublicID) == want })
	if at < 0 && len(known) > 1 {
		e.Warnings = append(e.Warnings, fmt.Sprintf("of %d magnitudes none is preferred: a moment magnitude taken, else the first", len(known)))
		at = slices.IndexFunc(known, func(m xmlMagnitude) bool { return strings.HasPrefix(strings.ToLower(strings.TrimSpace(m.Type)), "mw") })
	}
	m := known[max(0, at)]
	e.Magnitude, e.MagnitudeType = m.Value.Number, strings.TrimSpace(m.Type)
	return nil
}
