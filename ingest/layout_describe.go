package ingest

import (
	"math"
	"strconv"
)

// step joins what the lines before the numbers, the description, the column of
// times and the hints say of the time step, in s.
func (l *Layout) step(v layoutValues, s *layoutSeries, hints Hints) (float64, error) {
	step, line, err := l.statedStep(v)
	if err != nil {
		return 0, err
	}
	for i, c := range s.columns {
		if !c.time {
			continue
		}
		timed, err := timeStep(s.values[i], s.resolution, s.lines())
		if err != nil {
			return 0, err
		}
		timed = nearlyNice(timed * c.scale)
		if step == 0 {
			step, line = timed, s.line(0)
		} else if math.Abs(timed-step) > stepAgreement*timed {
			return 0, refuse(line, "dt", "the header says %.6g s, the time column steps by %.6g s", step, timed)
		}
	}
	switch {
	case step != 0:
		return step, checkStep(step, line, hints)
	case hints.StepS != 0:
		return hints.StepS, nil
	}
	return 0, refuse(0, "dt", "the file states no time step: give it with --dt, in the catalogue's dt_s column or in the layout")
}

// statedStep returns the step that is stated as a step or a rate, 0 where none
// is. Both must agree.
func (l *Layout) statedStep(v layoutValues) (step float64, line int, err error) {
	if s, ok := l.stated(v, "dt_s", 0); ok {
		if step, err = positiveNumber(s.text); err != nil {
			return 0, 0, refuse(s.line, "dt_s", "%w", err)
		}
		line = s.line
	}
	if s, ok := l.stated(v, "rate_hz", 0); ok {
		rate, err := positiveNumber(s.text)
		switch {
		case err != nil:
			return 0, 0, refuse(s.line, "rate_hz", "%w", err)
		case step == 0:
			return 1 / rate, s.line, nil
		case math.Abs(step*rate-1) > stepAgreement:
			return 0, 0, refuse(s.line, "rate_hz", "%g Hz here, a time step of %g s in line %d", rate, step, line)
		}
	}
	return step, line, nil
}

// channel makes a channel of one column of the series.
func (l *Layout) channel(s *layoutSeries, i int, v layoutValues, step float64, hints Hints) (Channel, error) {
	column := s.columns[i].number
	c := Channel{StepS: step, Acceleration: s.values[i], Line: s.line(0), Siting: SitingUnknown, Processing: ProcessingUnknown}
	if err := l.numbers.checkMissing(s, i); err != nil {
		return c, err
	}
	if err := l.unit(&c, v, column, hints); err != nil {
		return c, err
	}
	if err := l.orient(&c, v, column); err != nil {
		return c, err
	}
	l.describe(&c, v, column)
	c.Warnings = append(c.Warnings, v.doubts...)
	if s.minus > 0 {
		c.warn("line %d: U+2212 read as a minus sign", s.minus)
	}
	warnOffset(&c)
	scale(c.Acceleration, c.UnitMPS2)
	return c, nil
}

// unit settles what a number of the file means in m/s², and the header's peak.
func (l *Layout) unit(c *Channel, v layoutValues, column int, hints Hints) error {
	stated, _ := l.stated(v, "unit", column)
	unit, warning, err := chooseUnit(stated, hints)
	if err != nil {
		return err
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	if p, ok := l.stated(v, "peak", column); ok {
		peak, err := numberWithin(p.text, limits{-maxPlain, maxPlain})
		if err != nil {
			return refuse(p.line, "peak", "%w", err)
		}
		if !isMark(peak) {
			c.HeaderPeak = Known(math.Abs(peak) * unit.MPS2)
		}
	}
	factor := 1.0
	for _, name := range []string{"scale", "scale_divisor"} {
		s, ok := l.stated(v, name, column)
		if !ok {
			continue
		}
		f, err := positiveNumber(s.text)
		if err != nil {
			return refuse(s.line, name, "%w", err)
		}
		if name == "scale" {
			factor *= f
		} else {
			factor /= f
		}
		c.Unit = "counts"
	}
	c.UnitMPS2 *= factor
	if !(c.UnitMPS2 > 0) || c.UnitMPS2 > maxPlain {
		return refuse(0, "scale", "%g m/s² a count is no scale", c.UnitMPS2)
	}
	return nil
}

// layoutDirection reads a direction; a digit that is a rank stays one.
func layoutDirection(text string) (Orientation, bool) {
	if o, ok := direction(text); ok {
		return o, true
	}
	return statedDirection(text)
}

// orient settles the direction, which decides what the motion counts for: what
// is not understood is an error.
func (l *Layout) orient(c *Channel, v layoutValues, column int) error {
	if s, ok := l.stated(v, "direction", column); ok {
		o, known := l.directions[s.text]
		if !known {
			if o, known = layoutDirection(s.text); !known {
				return refuse(s.line, "direction", "unknown direction %s; say under [directions] what it means", found(s.text))
			}
		}
		o.Label = s.text
		c.Orientation = o
	}
	s, ok := l.stated(v, "azimuth_deg", column)
	if !ok {
		return nil
	}
	azimuthDeg, err := numberWithin(s.text, limits{0, 360})
	if err != nil {
		return refuse(s.line, "azimuth_deg", "%w", err)
	}
	if c.Orientation.Axis == AxisVertical {
		return nil // headers give a vertical an azimuth that means nothing
	}
	label := orElse(c.Orientation.Label, s.text)
	c.Orientation = azimuth(azimuthDeg)
	c.Orientation.Label = label
	return nil
}

// describe fills in what is known of event, station and record. What is not
// understood is a warning.
func (l *Layout) describe(c *Channel, v layoutValues, column int) {
	row := catalogueRow{channel: *c}
	for _, name := range quantityNames() {
		s, ok := l.stated(v, name, column)
		if !ok {
			continue
		}
		var err error
		switch text := s.text; name {
		case "unit", "dt_s", "rate_hz", "count", "channels", "scale", "scale_divisor", "peak", "direction", "azimuth_deg": // settled
		case "channel":
			row.channel.ChannelCode = text
		case "processing":
			row.channel.Processing, err = parseProcessing(text)
		case "start_time":
			row.channel.Start, _, _ = parseInstant(text)
		case "siting":
			if _, ok := parseSiting(text); !ok {
				text = string(SitingFromWords(text))
			}
			err = setSiting(&row, text)
		case "station_latitude", "station_longitude", "event_latitude", "event_longitude":
			if deg, err := degrees(text); err == nil {
				text = strconv.FormatFloat(deg, 'g', -1, 64)
			}
			fallthrough
		default:
			err = catalogueColumns[name].set(&row, text)
		}
		if err != nil {
			row.channel.warn("line %d: %s %s not understood", s.line, name, found(s.text))
		}
	}
	*c = row.channel
	c.Event.ID, c.Station.Code, c.Station.Network = row.event, row.station, row.network
	l.times(c, v)
	settlePlaces(c)
}

// times fills in the times that patterns found.
func (l *Layout) times(c *Channel, v layoutValues) {
	if p := v.times["origin_time"]; p != nil {
		var ok bool
		if c.Event.Origin, c.Event.Date, ok = p.instant(); !ok {
			c.warn("line %d: origin_time not understood", p.line)
		}
	}
	if p := v.times["start_time"]; p != nil {
		at, _, ok := p.instant()
		if c.Start = at; !ok || at.IsZero() {
			c.warn("line %d: start_time not understood", p.line)
		}
	}
}

// settlePlaces drops positions and filter corners that headers state and that
// cannot be, with a warning, and writes longitudes within ±180°.
func settlePlaces(c *Channel) {
	settle := func(what string, latitude, longitude *Number) {
		if longitude.Value > 180 {
			longitude.Value -= 360
		}
		stated := latitude.Known || longitude.Known
		*latitude, *longitude = position(*latitude, *longitude)
		if stated && !latitude.Known {
			c.warn("position of the %s is incomplete or none, not used", what)
		}
	}
	settle("event", &c.Event.Latitude, &c.Event.Longitude)
	settle("station", &c.Station.Latitude, &c.Station.Longitude)
	if c.LowCutHz.Known && c.HighCutHz.Known && c.LowCutHz.Value >= c.HighCutHz.Value {
		c.warn("filter corners %g and %g Hz contradict each other, not used", c.LowCutHz.Value, c.HighCutHz.Value)
		c.LowCutHz, c.HighCutHz = Number{}, Number{}
	}
}
