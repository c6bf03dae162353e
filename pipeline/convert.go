package pipeline

import (
	"swaybook/db"
	"swaybook/ingest"
)

// recordOf describes the record that a channel belongs to.
func recordOf(c ingest.Channel, code string) db.Record {
	r := db.Record{Code: code, Instrument: c.Instrument, Siting: string(c.Siting), Start: c.Start, Distances: db.Distances{BestKM: pointer(c.DistanceKM)}}
	if r.Siting == "" {
		r.Siting = string(ingest.SitingUnknown)
	}
	r.Event = eventOf(&c)
	if c.Station.Code != "" || c.Station.Name != "" {
		s := c.Station
		r.Station = &db.Station{
			Network: s.Network, Code: ingest.StationCode(&c), Name: s.Name, LatitudeDeg: pointer(s.Latitude), LongitudeDeg: pointer(s.Longitude),
			ElevationM: pointer(s.ElevationM), Vs30MPS: pointer(s.Vs30), SiteClass: s.SiteClass,
		}
	}
	return r
}

// eventOf is the channel's event, nil where it has no code.
func eventOf(c *ingest.Channel) *db.Event {
	code := ingest.EventCode(c)
	if code == "" {
		return nil
	}
	e := c.Event
	return &db.Event{
		Code: code, Name: e.Name, Origin: e.Origin, LatitudeDeg: pointer(e.Latitude), LongitudeDeg: pointer(e.Longitude),
		DepthKM: pointer(e.DepthKM), Magnitude: pointer(e.Magnitude), MagnitudeType: e.MagnitudeType,
	}
}

// channelOf is the description, without samples, of what is held.
func channelOf(h db.HeldComponent) ingest.Channel {
	c := ingest.Channel{
		Instrument: h.Record.Instrument, ChannelCode: h.Channel, Siting: ingest.Siting(h.Record.Siting),
		Orientation: orientationOf(h.Component), Start: h.Record.Start, StepS: h.StepS,
		Unit: h.Unit, Processing: ingest.Processing(h.Processing), LowCutHz: number(h.LowCutHz), HighCutHz: number(h.HighCutHz),
	}
	if e := h.Record.Event; e != nil {
		c.Event = ingest.Event{
			ID: e.OwnCode, Name: e.Name, Origin: e.Origin, Latitude: number(e.LatitudeDeg), Longitude: number(e.LongitudeDeg),
			DepthKM: number(e.DepthKM), Magnitude: number(e.Magnitude), MagnitudeType: e.MagnitudeType,
		}
	}
	if s := h.Record.Station; s != nil {
		c.Station = ingest.Station{
			Network: s.Network, Code: s.Code, Name: s.Name, Latitude: number(s.LatitudeDeg), Longitude: number(s.LongitudeDeg),
			ElevationM: number(s.ElevationM), Vs30: number(s.Vs30MPS), SiteClass: s.SiteClass,
		}
	}
	return c
}

// axes are the store's names of the axes.
var axes = map[ingest.Axis]string{
	ingest.AxisUnknown:    db.AxisUnknown,
	ingest.AxisHorizontal: db.AxisHorizontal,
	ingest.AxisVertical:   db.AxisVertical,
}

func componentOf(s solved, role string) db.Component {
	c := s.channel
	return db.Component{
		Role: role, Axis: axes[c.Orientation.Axis], Label: c.Orientation.Label, Rank: c.Orientation.Order,
		AzimuthDeg: pointer(c.Orientation.AzimuthDeg), Channel: c.ChannelCode, Start: c.Start, StepS: c.StepS, Samples: s.samples, Unit: c.Unit,
		Processing: string(c.Processing), LowCutHz: pointer(c.LowCutHz), HighCutHz: pointer(c.HighCutHz),
		HeaderPeak: pointer(c.HeaderPeak), Warnings: c.Warnings, Findings: s.findings, SourceLine: c.Line,
	}
}

func orientationOf(c db.Component) ingest.Orientation {
	o := ingest.Orientation{Label: c.Label, Order: c.Rank, AzimuthDeg: number(c.AzimuthDeg)}
	for axis, name := range axes {
		if name == c.Axis {
			o.Axis = axis
		}
	}
	return o
}

func orientationsOf(components []db.Component) []ingest.Orientation {
	out := make([]ingest.Orientation, len(components))
	for i, c := range components {
		out[i] = orientationOf(c)
	}
	return out
}

func pointer(n ingest.Number) *float64 {
	if !n.Known {
		return nil
	}
	return &n.Value
}

func number(p *float64) ingest.Number {
	if p == nil {
		return ingest.Number{}
	}
	return ingest.Known(*p)
}
