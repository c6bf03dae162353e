package fdsnxml

import (
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
	Latitude, Longitude float64
	ElevationM          float64
	Start, End          time.Time // zero where open
}

// Channel is one epoch of a channel.
type Channel struct {
	Network, Station, Location, Code string // a location that is blank or "--" is ""
	SiteName                         string
	Start, End                       time.Time // zero where open
	Latitude, Longitude              float64   // degrees
	ElevationM                       float64   // of the sensor
	DepthM                           float64   // of the sensor below the ground
	AzimuthDeg                       *float64  // clockwise from north, nil where not stated
	DipDeg                           *float64  // down from the horizontal, nil where not stated
	RateHz                           float64   // 0 where not stated
	Sensitivity                      *Sensitivity
	// Polynomial says that the response is a polynomial and has no sensitivity.
	Polynomial bool
	// StageGain is the product of the gains of all stages, 0 where not stated.
	StageGain float64
}

// Sensitivity is what an instrument makes of its input: Value output units for
// one input unit, at a frequency.
type Sensitivity struct {
	Value       float64
	FrequencyHz float64
	InputUnit   string
	OutputUnit  string
}

// Inventory is what StationXML documents say.
type Inventory struct {
	Stations []Station
	Channels []Channel

	stations, channels index
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
			Value     number `xml:"Value"`
			Frequency number `xml:"Frequency"`
			Input     string `xml:"InputUnits>Name"`
			Output    string `xml:"OutputUnits>Name"`
		} `xml:"InstrumentSensitivity"`
		Polynomial *struct{} `xml:"InstrumentPolynomial"`
		Stages     []struct {
			Gain number `xml:"StageGain>Value"`
		} `xml:"Stage"`
	}
)

// ReadStations reads a StationXML document. An error is an *Error with the line,
// or says that the document is too large.
func ReadStations(data []byte) (*Inventory, error) {
	d, err := open(data, stationRoot, stationNamespace)
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

func (r *stationReader) network(code string) error {
	return r.children(func(e xml.StartElement) error {
		if e.Name.Local != "Station" {
			return r.reader.Skip()
		}
		return r.station(strings.TrimSpace(code), e)
	})
}

// station reads the station's own elements one by one, since its channels, which
// are the bulk of a document, are read and dropped in turn.
func (r *stationReader) station(network string, start xml.StartElement) error {
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
			var c xmlChannel
			if err := r.reader.DecodeElement(&c, &e); err != nil {
				return err
			}
			channel, err := c.channel(network, strings.TrimSpace(raw.Code))
			channels = append(channels, channel)
			return err
		}
		return r.reader.Skip()
	})
	if err != nil {
		return err
	}
	s, err := raw.station(network)
	if err != nil {
		return r.fault(err)
	}
	for _, c := range channels {
		c.SiteName = s.Name
		r.inventory.addChannel(c)
	}
	r.inventory.addStation(s)
	return nil
}

func (raw *xmlStation) station(network string) (s Station, err error) {
	s = Station{
		Network: network, Code: strings.TrimSpace(raw.Code), Name: strings.TrimSpace(raw.Site),
		Latitude: raw.Latitude.value, Longitude: raw.Longitude.value, ElevationM: raw.Elevation.value,
	}
	if s.Start, s.End, err = epoch(raw.Start, raw.End); err == nil {
		err = position(raw.Latitude, raw.Longitude)
	}
	if err != nil {
		return s, fmt.Errorf("station %s.%s: %w", s.Network, s.Code, err)
	}
	return s, nil
}

func (raw *xmlChannel) channel(network, station string) (c Channel, err error) {
	c = Channel{
		Network: network, Station: station, Location: location(raw.Location), Code: strings.TrimSpace(raw.Code),
		Latitude: raw.Latitude.value, Longitude: raw.Longitude.value, ElevationM: raw.Elevation.value, DepthM: raw.Depth.value,
		AzimuthDeg: raw.Azimuth.pointer(), DipDeg: raw.Dip.pointer(), RateHz: raw.SampleRate.value,
		Polynomial: raw.Response.Polynomial != nil, StageGain: raw.Response.stageGain(),
	}
	if s := raw.Response.Sensitivity; s != nil && s.Value.known {
		c.Sensitivity = &Sensitivity{
			Value: s.Value.value, FrequencyHz: s.Frequency.value,
			InputUnit: strings.TrimSpace(s.Input), OutputUnit: strings.TrimSpace(s.Output),
		}
	}
	c.Start, c.End, err = epoch(raw.Start, raw.End)
	for _, check := range []error{
		position(raw.Latitude, raw.Longitude), raw.Azimuth.within("azimuth", -360, 360), raw.Dip.within("dip", -90, 90),
	} {
		if err == nil {
			err = check
		}
	}
	if err != nil {
		return c, fmt.Errorf("channel %s: %w", c.name(), err)
	}
	if a := c.AzimuthDeg; a != nil {
		*a = math.Mod(*a+360, 360)
	}
	return c, nil
}

// stageGain is the product of all gains.
func (r *xmlResponse) stageGain() float64 {
	product := 0.0
	for i, s := range r.Stages {
		if i == 0 {
			product = 1
		}
		if s.Gain.known {
			product *= s.Gain.value
		}
	}
	return product
}

// name is the channel as XX.ABC.00.HNE.
func (c *Channel) name() string {
	return strings.Join([]string{c.Network, c.Station, c.Location, c.Code}, ".")
}

// name is the station as XX.ABC.
func (s *Station) name() string { return s.Network + "." + s.Code }

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

func position(latitude, longitude number) error {
	if !latitude.known || !longitude.known {
		return fmt.Errorf("no latitude or no longitude")
	}
	if err := latitude.within("latitude", -90, 90); err != nil {
		return err
	}
	return longitude.within("longitude", -180, 180)
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
