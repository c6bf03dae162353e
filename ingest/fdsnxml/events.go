package fdsnxml

import (
	"cmp"
	"encoding/xml"
	"errors"
	"fmt"
	"slices"
	"strings"
	"time"
)

// Event is one event with its preferred origin and magnitude.
type Event struct {
	PublicID            string
	Code                string // the catalogue's own code, "" where not stated
	Type                string // "earthquake", "quarry blast" …, "" where not stated
	Name                string // the description: the place in words
	Origin              time.Time
	Latitude, Longitude float64  // degrees
	DepthM              *float64 // nil where not stated
	Magnitude           *float64 // nil where not stated
	MagnitudeType       string   // Mw, ML …
	// Warnings say what had to be chosen.
	Warnings []string
}

// The depths of an origin, in m. Beyond them the unit is mistaken.
const minDepthM, maxDepthM = -10e3, 800e3

// The elements of QuakeML that are read.
type (
	xmlEvent struct {
		PublicID     string         `xml:"publicID,attr"`
		Code         string         `xml:"eventid,attr"`
		Origin       string         `xml:"preferredOriginID"`
		Magnitude    string         `xml:"preferredMagnitudeID"`
		Type         string         `xml:"type"`
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

// ReadEvents reads a QuakeML document. An error is an *Error with the line, or
// says that the document is too large.
func ReadEvents(data []byte) ([]Event, error) {
	d, err := open(data, eventRoot, eventNamespace)
	if err != nil {
		return nil, err
	}
	var events []Event
	err = d.children(func(e xml.StartElement) error {
		if e.Name.Local != "eventParameters" {
			return d.reader.Skip()
		}
		return d.children(func(e xml.StartElement) error {
			if e.Name.Local != "event" {
				return d.reader.Skip()
			}
			var raw xmlEvent
			if err := d.reader.DecodeElement(&raw, &e); err != nil {
				return err
			}
			event, err := raw.event()
			events = append(events, event)
			return err
		})
	})
	if err != nil {
		return nil, err
	}
	return events, d.close()
}

func (raw *xmlEvent) event() (e Event, err error) {
	e = Event{PublicID: strings.TrimSpace(raw.PublicID), Code: strings.TrimSpace(raw.Code), Type: strings.TrimSpace(raw.Type), Name: raw.name()}
	o, err := raw.origin(&e)
	if err == nil {
		err = o.describe(&e)
	}
	if err == nil {
		err = raw.magnitude(&e)
	}
	if err != nil {
		return e, fmt.Errorf("event %.80s: %w", e.PublicID, err)
	}
	return e, nil
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
	if err := position(o.Latitude, o.Longitude); err != nil {
		return err
	}
	if err := o.Depth.within("depth in m", minDepthM, maxDepthM); err != nil {
		return err
	}
	e.Latitude, e.Longitude, e.DepthM = o.Latitude.value, o.Longitude.value, o.Depth.pointer()
	return nil
}

// magnitude takes the preferred one, else a moment magnitude, else the first.
func (raw *xmlEvent) magnitude(e *Event) error {
	known := slices.DeleteFunc(slices.Clone(raw.Magnitudes), func(m xmlMagnitude) bool { return !m.Value.known })
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
	e.Magnitude, e.MagnitudeType = m.Value.pointer(), strings.TrimSpace(m.Type)
	return m.Value.within("magnitude", -3, 11)
}
