package fdsnxml

import (
	"cmp"
	"context"
	"encoding/xml"
	"fmt"
	"math"
	"strings"
	"time"
)

// openYear is the year from which on an end date means that there is none:
// documents write 2500, 2599, 2999 and 3000.
const openYear = 2500

// Station is one epoch of a station.
type Station struct {
	Network, Code       string
	Name                string // of the site
	Latitude, Longitude Number // degrees; both or none
	ElevationM          Number
	Start, End          time.Time // zero where open
}

// Channel is one epoch of a channel.
type Channel struct {
	Network, Station, Location, Code string // a location that is blank or "--" is ""
	SiteName                         string
	Start, End                       time.Time // zero where open
	Latitude, Longitude              Number    // degrees; both or none
	ElevationM                       Number    // of the sensor
	DepthM                           float64   // of the sensor below the ground, 0 where not stated
	AzimuthDeg                       Number    // clockwise from north
	DipDeg                           Number    // down from the horizontal
	RateHz                           float64   // 0 where not stated
	Sensitivity                      Sensitivity
	// Polynomial says that the response is a polynomial and has no sensitivity.
	Polynomial bool
	// StageGain is the product of the gains of all stages, 0 where not stated.
	StageGain float64
	// Path is that of the document, "" before Merge, and Line that of the element; of
	// several epochs Path names all and Line is 0.
	Path string
	Line int
	// Doubts are what several epochs say otherwise of what does not decide about the
	// samples, "" where that is nothing.
	Doubts string
}

// Place names the element: path:line.
func (c *Channel) Place() string {
	if c.Line == 0 {
		return c.Path
	}
	return fmt.Sprintf("%s:%d", c.Path, c.Line)
}

// Sensitivity is what an instrument makes of its input: Value output units for
// one input unit.
type Sensitivity struct {
	Value      Number
	InputUnit  string
	OutputUnit string
}

// Inventory is what StationXML documents say.
type Inventory struct {
	Stations []Station
	Channels []Channel
	// Notes say what of a document that was read was not taken; Merge leaves them.
	Notes []Note

	stations index[Station]
	channels index[Channel]
}

// The elements of StationXML that are read. The order of elements does not
// matter to package xml, and others are passed over.
type (
	xmlStation struct {
		Code      string `xml:"code,attr"`
		Start     string `xml:"startDate,attr"`
		End       string `xml:"endDate,attr"`
		Latitude  number `xml:"Latitude"`
		Longitude number `xml:"Longitude"`
		Elevation number `xml:"Elevation"`
		Site      string `xml:"Site>Name"`
	}
	xmlChannel struct {
		Code       string      `xml:"code,attr"`
		Location   string      `xml:"locationCode,attr"`
		Start      string      `xml:"startDate,attr"`
		End        string      `xml:"endDate,attr"`
		Latitude   number      `xml:"Latitude"`
		Longitude  number      `xml:"Longitude"`
		Elevation  number      `xml:"Elevation"`
		Depth      number      `xml:"Depth"`
		Azimuth    number      `xml:"Azimuth"`
		Dip        number      `xml:"Dip"`
		SampleRate number      `xml:"SampleRate"`
		Response   xmlResponse `xml:"Response"`
	}
	xmlResponse struct {
		Sensitivity *struct {
			Value  number `xml:"Value"`
			Input  string `xml:"InputUnits>Name"`
			Output string `xml:"OutputUnits>Name"`
		} `xml:"InstrumentSensitivity"`
		Polynomial *struct{} `xml:"InstrumentPolynomial"`
		Stages     []struct {
			Gain number `xml:"StageGain>Value"`
		} `xml:"Stage"`
	}
)

// ReadStations reads a StationXML document. Stations and channels that cannot be
// used are left out, and the Notes say why. An error is an *Error with the line,
// says that the document is too large, or is the context's.
func ReadStations(ctx context.Context, data []byte) (*Inventory, error) {
	d, err := open(ctx, data, stationRoot, stationNamespace)
	if err != nil {
		return nil, err
	}
	r := stationReader{document: d, inventory: &Inventory{}}
	err = d.children(func(e xml.StartElement) error {
		if e.Name.Local != "Network" {
			return d.reader.Skip()
		}
		return r.network(attribute(e, "code"))
	})
	if err != nil {
		return nil, err
	}
	return r.inventory, d.close()
}

type stationReader struct {
	*document
	inventory *Inventory
}

func (r *stationReader) note(n Note) { r.inventory.Notes = append(r.inventory.Notes, n) }

func (r *stationReader) network(code string) error {
	return r.children(func(e xml.StartElement) error {
		if e.Name.Local != "Station" {
			return r.reader.Skip()
		}
		return r.station(strings.TrimSpace(code), e)
	})
}

// station reads the station's own elements one by one, since its channels, which
// are the bulk of a document, are read and dropped in turn. They stand without
// their station.
func (r *stationReader) station(network string, start xml.StartElement) error {
	line := r.line()
	raw := xmlStation{Code: attribute(start, "code"), Start: attribute(start, "startDate"), End: attribute(start, "endDate")}
	var channels []Channel
	err := r.children(func(e xml.StartElement) error {
		switch e.Name.Local {
		case "Latitude":
			return r.reader.DecodeElement(&raw.Latitude, &e)
		case "Longitude":
			return r.reader.DecodeElement(&raw.Longitude, &e)
		case "Elevation":
			return r.reader.DecodeElement(&raw.Elevation, &e)
		case "Site":
			var site struct{ Name string }
			err := r.reader.DecodeElement(&site, &e)
			raw.Site = site.Name
			return err
		case "Channel":
			c, ok, err := r.channel(network, strings.TrimSpace(raw.Code), e)
			if ok {
				channels = append(channels, c)
			}
			return err
		}
		return r.reader.Skip()
	})
	if err != nil {
		return err
	}
	s, err := raw.station(network)
	if err != nil {
		r.note(leftOut(line, "station "+s.name().String(), err))
	} else {
		r.place(line, "station "+s.name().String(), &s.Latitude, &s.Longitude)
		r.inventory.addStation(s)
	}
	for _, c := range channels {
		c.SiteName = s.Name
		r.inventory.addChannel(c)
	}
	return nil
}

// channel reads one channel; ok is false where it is left out.
func (r *stationReader) channel(network, station string, start xml.StartElement) (c Channel, ok bool, err error) {
	raw, line := xmlChannel{}, r.line()
	if err := r.reader.DecodeElement(&raw, &start); err != nil {
		return c, false, err
	}
	c, err = raw.channel(network, station)
	c.Line = line
	name := "channel " + c.name().String()
	if err != nil {
		r.note(leftOut(line, name, err))
		return c, false, nil
	}
	r.place(line, name, &c.Latitude, &c.Longitude)
	return c, true, nil
}

// place makes a position that is none unknown.
func (r *stationReader) place(line int, name string, latitude, longitude *Number) {
	var err error
	if *latitude, *longitude, err = position(*latitude, *longitude); err != nil {
		r.note(Note{line, fmt.Sprintf("%.80s: %v: position taken as unknown", name, err)})
	}
}

func (raw *xmlStation) station(network string) (s Station, err error) {
	s = Station{
		Network: network, Code: strings.TrimSpace(raw.Code), Name: strings.TrimSpace(raw.Site),
		Latitude: raw.Latitude.Number, Longitude: raw.Longitude.Number, ElevationM: raw.Elevation.Number,
	}
	s.Start, s.End, err = epoch(raw.Start, raw.End)
	return s, cmp.Or(err, firstBad(raw.Latitude, raw.Longitude, raw.Elevation), bothKnown(s.Latitude, s.Longitude))
}

func (raw *xmlChannel) channel(network, station string) (c Channel, err error) {
	c = Channel{
		Network: network, Station: station, Location: location(raw.Location), Code: strings.TrimSpace(raw.Code),
		Latitude: raw.Latitude.Number, Longitude: raw.Longitude.Number, ElevationM: raw.Elevation.Number, DepthM: raw.Depth.Value,
		AzimuthDeg: raw.Azimuth.Number, DipDeg: raw.Dip.Number, RateHz: raw.SampleRate.Value,
		Polynomial: raw.Response.Polynomial != nil,
	}
	if s := raw.Response.Sensitivity; s != nil && s.Value.Known {
		c.Sensitivity = Sensitivity{Value: s.Value.Number, InputUnit: strings.TrimSpace(s.Input), OutputUnit: strings.TrimSpace(s.Output)}
	}
	c.Start, c.End, err = epoch(raw.Start, raw.End)
	var badGain error
	c.StageGain, badGain = raw.Response.stageGain()
	err = cmp.Or(err, firstBad(raw.Latitude, raw.Longitude, raw.Elevation, raw.Depth, raw.Azimuth, raw.Dip, raw.SampleRate),
		raw.Response.badSensitivity(), badGain, bothKnown(c.Latitude, c.Longitude),
		c.AzimuthDeg.within("azimuth", -360, 360), c.DipDeg.within("dip", -90, 90))
	if c.AzimuthDeg.Known && err == nil {
		if c.AzimuthDeg.Value < 0 {
			c.AzimuthDeg.Value += 360
		}
		c.AzimuthDeg.Value = math.Mod(c.AzimuthDeg.Value, 360)
	}
	return c, err
}

func bothKnown(latitude, longitude Number) error {
	if !latitude.Known || !longitude.Known {
		return errNoPosition
	}
	return nil
}

func (r *xmlResponse) badSensitivity() error {
	if r.Sensitivity == nil {
		return nil
	}
	return r.Sensitivity.Value.bad
}

// stageGain is the product of all gains.
func (r *xmlResponse) stageGain() (float64, error) {
	product := 0.0
	for i, s := range r.Stages {
		if i == 0 {
			product = 1
		}
		if s.Gain.bad != nil {
			return 0, s.Gain.bad
		}
		if s.Gain.Known {
			product *= s.Gain.Value
		}
	}
	return product, nil
}

func epoch(from, to string) (start, end time.Time, err error) {
	if start, err = instant(from); err != nil {
		return start, end, fmt.Errorf("startDate: %w", err)
	}
	if end, err = instant(to); err != nil {
		return start, end, fmt.Errorf("endDate: %w", err)
	}
	if end.Year() >= openYear {
		end = time.Time{}
	}
	if !end.IsZero() && end.Before(start) {
		return start, end, fmt.Errorf("endDate %s is before startDate %s", to, from)
	}
	return start, end, nil
}

// location is a location code; blank and "--" are the same.
func location(s string) string {
	if s = strings.TrimSpace(s); s == "--" {
		return ""
	}
	return s
}

func attribute(e xml.StartElement, name string) string {
	for _, a := range e.Attr {
		if a.Name.Local == name {
			return a.Value
		}
	}
	return ""
}
