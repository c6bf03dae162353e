package ingest

import (
	"strings"
	"time"
)

// describe reads the header into the channel and returns the number of samples
// it announces.
func (h *esmHeader) describe(c *Channel, hints Hints) (count int, err error) {
	h.event(c)
	h.station(c)
	h.sensor(c)
	c.Start = h.time(c, esmStart, "20060102_150405", "")
	h.processing(c)
	if err := h.unit(c, hints); err != nil {
		return 0, err
	}
	if peak := h.number(c, esmPeak); peak.Known {
		c.HeaderPeak = Known(peak.Value * c.UnitMPS2)
	}
	return h.timing(c, hints)
}

func (h *esmHeader) event(c *Channel) {
	e := &c.Event
	e.ID = h.text(esmEventID)
	if name := h.text(esmEventName); !strings.EqualFold(name, "noname") {
		e.Name = name
	}
	if e.Date = h.time(c, esmEventDate, "20060102", ""); !e.Date.IsZero() {
		e.Origin = h.time(c, esmEventTime, "20060102150405", h.text(esmEventDate))
	}
	if !e.Origin.IsZero() {
		e.Date = time.Time{}
	}
	e.Latitude, e.Longitude = position(h.number(c, esmEventLatitude), h.number(c, esmEventLongitude))
	e.DepthKM = h.number(c, esmEventDepth)
	if e.Magnitude = h.positive(c, esmMagnitudeW); e.Magnitude.Known {
		e.MagnitudeType = "Mw"
	} else if e.Magnitude = h.positive(c, esmMagnitudeL); e.Magnitude.Known {
		e.MagnitudeType = "ML"
	}
}

func (h *esmHeader) station(c *Channel) {
	s := &c.Station
	s.Network, s.Code, s.Name = h.text(esmNetwork), h.text(esmStation), h.text(esmStationName)
	s.Latitude, s.Longitude = position(h.number(c, esmLatitude), h.number(c, esmLongitude))
	s.ElevationM = h.number(c, esmElevation)
	s.Vs30 = h.positive(c, esmVs30)
	class := h.at(esmSiteClass)
	if ground, ok := parseGroundType(class.text); ok {
		s.SiteClass = ground
	} else if class.text != "" && class.text != "U" {
		c.warn("line %d: %s %s not understood", class.line, esmSiteClass, found(class.text))
	}
	c.Distances.EpicentralKM = h.number(c, esmDistance)
}

// sensor reads the channel's direction and the instrument, which is told by the
// location and the first two letters of the stream, so that two sensors of one
// station do not become one record.
func (h *esmHeader) sensor(c *Channel) {
	stream := h.at(esmStream)
	c.ChannelCode = stream.text
	c.Instrument = h.text(esmLocation)
	if n := len(stream.text); n > 1 {
		c.Instrument = strings.TrimSpace(c.Instrument + " " + stream.text[:n-1])
	}
	c.Orientation = esmOrientation(stream.text)
	if c.Orientation.Axis == AxisUnknown {
		c.warn("%s %s names no known direction", esmStream, found(stream.text))
	}
	c.Siting = SitingUnknown
	if depth := h.number(c, esmSensorDepth); depth.Known {
		c.Siting = sitingWithHeight(c, SitingUnknown, Known(-depth.Value))
	}
}

// esmOrientation reads the last letter of a stream. 1, 2, 3, X and Y are
// horizontals whose azimuth no key gives.
//
// Source: FDSN Source Identifiers, orientation codes (from memory), for those
// that name no compass point.
func esmOrientation(stream string) Orientation {
	if stream == "" {
		return Orientation{}
	}
	letter := strings.ToUpper(stream[len(stream)-1:])
	o := Orientation{Axis: AxisHorizontal, Label: letter}
	switch letter {
	case "N":
		o.AzimuthDeg = Known(0)
	case "E":
		o.AzimuthDeg = Known(90)
	case "Z":
		o.Axis = AxisVertical
	case "1", "X":
		o.Order = 1
	case "2", "Y":
		o.Order = 2
	case "3":
	default:
		return Orientation{Label: stream}
	}
	return o
}

// processing reads the state of correction and the filter's corners. Where the
// two contradict each other the corners are kept.
func (h *esmHeader) processing(c *Channel) {
	c.LowCutHz, c.HighCutHz = h.positive(c, esmLowCut), h.positive(c, esmHighCut)
	if c.LowCutHz.Known && c.HighCutHz.Known && c.LowCutHz.Value >= c.HighCutHz.Value {
		c.warn("filter corners of %g and %g Hz are not used: the low one must be the smaller", c.LowCutHz.Value, c.HighCutHz.Value)
		c.LowCutHz, c.HighCutHz = Number{}, Number{}
	}
	filtered := c.LowCutHz.Known || c.HighCutHz.Known
	stated := strings.ToLower(h.values[esmProcessing].text)
	switch {
	case strings.HasPrefix(stated, "none"):
		c.Processing = ProcessingRaw
		if filtered {
			c.Processing = ProcessingCorrected
			c.warn("%s is none, but filter corners are stated: taken as filtered", esmProcessing)
		}
	case strings.HasPrefix(stated, "manual") || strings.HasPrefix(stated, "automatic"):
		c.Processing = ProcessingCorrected
		if !filtered {
			c.warn("%s is %s, but no filter corners are stated", esmProcessing, found(h.text(esmProcessing)))
		}
	case filtered:
		c.Processing = ProcessingCorrected
	default:
		c.Processing = ProcessingUnknown
	}
	if strings.EqualFold(h.text(esmBaseline), "BASELINE NOT REMOVED") {
		c.warn("the baseline was not removed")
	}
	if h.text(esmTrigger) == "LT" {
		c.warn("triggered late: the first arrival of the P wave is missing")
	}
}

// unit settles the unit of the values, which files of this layout give in cm/s²
// or by another name of it.
func (h *esmHeader) unit(c *Channel, hints Hints) error {
	stated := h.at(esmUnits)
	if stated.text == "" {
		return refuse(stated.line, esmUnits, "the header states no unit")
	}
	unit, err := ParseUnit(stated.text)
	if err != nil {
		return refuse(stated.line, esmUnits, "%w", err)
	}
	if unit.MPS2 != 0.01 {
		return refuse(stated.line, esmUnits, "acceleration is in %s; files of this layout are in cm/s2", unit.Name)
	}
	if unit, _, err = chooseUnit(stated, hints); err != nil {
		return err
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	return nil
}

// timing reads the step and returns the number of samples announced; with the
// length of the record the two must agree.
func (h *esmHeader) timing(c *Channel, hints Hints) (count int, err error) {
	step := h.at(esmStep)
	v, ok := parseNumber([]byte(step.text))
	if !ok || !(v > 0) {
		return 0, refuse(step.line, esmStep, "expected a time step over zero in s, found %s", found(step.text))
	}
	c.StepS = v
	announced := h.at(esmCount)
	if count, ok = valueCount(announced.text); !ok || announced.text == "" || count < 1 {
		return 0, refuse(announced.line, esmCount, "expected a number of values, found %s", found(announced.text))
	}
	length := h.positive(c, esmDuration)
	if length.Known && !lengthAgrees(length.Value, v, count) {
		return 0, refuse(h.at(esmDuration).line, esmDuration, "%d values every %.6g s do not last %g s", count, v, length.Value)
	}
	return count, checkStep(v, step.line, hints)
}
