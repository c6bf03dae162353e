package ingest

import (
	"errors"
	"math"
	"slices"
	"strings"

	"swaybook/ingest/fdsnxml"
	"swaybook/ingest/miniseed"
)

// boreholeDepthM is the depth from which on a sensor is taken to be in a hole;
// shallower ones stand in a pit or a vault. Common practice, with no source.
const boreholeDepthM = 3

// describe settles the scale of the samples and fills in what the epoch of the
// channel says.
func (c *mseedChannel) describe(t *miniseed.Trace, hints Hints) error {
	last := t.At(len(t.Samples) - 1)
	epoch, lookup := hints.Metadata.epoch(c.id.Network, c.id.Station, c.id.Location, c.id.Channel, t.Start, last)
	var err error
	isFloat, stated, asCounts := t.Encoding.IsFloat(), hints.Unit != "", IsCounts(hints.Unit)
	switch {
	case isFloat && !stated:
		return refuse(0, c.id.String(), "floating-point samples may be counts or an acceleration: say which with --unit")
	case isFloat && !asCounts:
		err = c.statedUnit(hints, epoch)
		if isContradiction(lookup) {
			c.warn("station metadata contradict each other, and are not used: %v", lookup)
		}
	case stated && !asCounts && !hints.UnitForAll:
		return refuse(0, c.id.String(), "the samples are counts, %s says %s", orElse(hints.UnitFrom, "the hint"), hints.Unit)
	case lookup != nil:
		return c.noEpoch(t, lookup)
	default:
		err = c.sensitivity(epoch)
	}
	if err == nil {
		err = c.orient(epoch)
	}
	if err != nil {
		return err
	}
	if epoch != nil {
		c.place(epoch)
		if epoch.Doubts != "" {
			c.warn("station metadata differ: %s", epoch.Doubts)
		}
	}
	return nil
}

// noEpoch says what is missing to read counts. Where documents contradict each other,
// nothing is: a further one would settle nothing.
func (c *mseedChannel) noEpoch(t *miniseed.Trace, lookup error) error {
	if isContradiction(lookup) {
		return refuse(0, c.id.String(), "station metadata contradict each other at %s: %w", instantText(t.Start), lookup)
	}
	known := ""
	if !errors.Is(lookup, fdsnxml.ErrUnknown) {
		known = "; " + lookup.Error()
	}
	return refuse(0, "", "counts need the sensitivity of %s at %s: name a StationXML file that covers it (--metadata)%s", c.id, instantText(t.Start), known)
}

func isContradiction(lookup error) bool {
	_, ok := errors.AsType[*fdsnxml.ContradictionError](lookup)
	return ok
}

// statedUnit takes the unit of the hints, whatever sensitivity the epoch, nil for
// none, has: the samples may have been divided by it.
func (c *mseedChannel) statedUnit(hints Hints, e *fdsnxml.Channel) error {
	unit, _, err := chooseUnit(statement{}, hints)
	c.Unit, c.UnitMPS2, c.Processing = unit.Name, unit.MPS2, ProcessingUnknown
	if err == nil && e != nil {
		c.warn("floating-point samples taken as %s, which %s says; the station metadata cover the channel too, and their sensitivity is not used",
			unit.Name, orElse(hints.UnitFrom, "the hint"))
	}
	return err
}

// countWords are how StationXML documents name the unit of a digitiser.
var countWords = []string{"count", "counts", "digital counts"}

// sensitivity takes the scale of counts from the epoch. A negative one turns the
// direction.
func (c *mseedChannel) sensitivity(e *fdsnxml.Channel) error {
	name, s := c.id.String(), e.Sensitivity
	switch {
	case !s.Value.Known && e.Polynomial:
		return refuse(0, name, "the station metadata give a polynomial, no sensitivity")
	case !s.Value.Known:
		return refuse(0, name, "the station metadata give no sensitivity")
	case isOtherMotion(s.InputUnit):
		return &NotMotionError{"its sensitivity is for " + s.InputUnit + ", not an acceleration"}
	case !slices.Contains(countWords, strings.ToLower(s.OutputUnit)):
		return refuse(0, name, "the sensitivity makes %s, not counts", found(s.OutputUnit))
	}
	unit, err := ParseUnit(s.InputUnit)
	if err != nil {
		return refuse(0, name, "input unit of the sensitivity: %w", err)
	}
	c.Unit, c.UnitMPS2 = "counts", unit.MPS2/math.Abs(s.Value.Value)
	if !(c.UnitMPS2 > 0) || math.IsInf(c.UnitMPS2, 0) {
		return refuse(0, name, "a sensitivity of %g is no scale", s.Value.Value)
	}
	c.counts, c.Processing, c.turned = true, ProcessingMeanRemoved, s.Value.Value < 0
	if c.turned {
		c.warn("the sensitivity is negative: the samples are turned")
	}
	if unit.MPS2 != 1 {
		c.warn("the sensitivity is for %s", unit.Name)
	}
	c.checkEpoch(e)
	return nil
}

// isOtherMotion reports whether a unit is one of velocity or displacement.
func isOtherMotion(unit string) bool {
	text := strings.TrimLeft(unitSpelling.Replace(strings.ToLower(unit)), "nuµ")
	_, velocity := cutUnit(text, perSecond)
	_, length := lengthWords[text]
	return velocity || length
}

// The differences from which on two statements of the metadata, or those of
// metadata and records, are told.
const (
	gainAgreement = 0.05
	rateAgreement = 1e-3
)

// checkEpoch compares what the epoch says twice, and what records say too.
func (c *mseedChannel) checkEpoch(e *fdsnxml.Channel) {
	s := e.Sensitivity.Value.Value
	if e.StageGain != 0 && math.Abs(e.StageGain-s) > gainAgreement*math.Abs(s) {
		c.warn("the stages' gains make %.6g, the sensitivity is %.6g", e.StageGain, s)
	}
	if e.RateHz > 0 && math.Abs(e.RateHz*c.StepS-1) > rateAgreement {
		c.warn("records have %.6g Hz, the station metadata say %.6g Hz", 1/c.StepS, e.RateHz)
	}
}

// place fills in station and siting.
func (c *mseedChannel) place(e *fdsnxml.Channel) {
	s := &c.Station
	s.Name = e.SiteName
	s.Latitude, s.Longitude = Number(e.Latitude), Number(e.Longitude)
	if e.ElevationM.Known {
		s.ElevationM = Known(e.ElevationM.Value + e.DepthM)
	}
	if e.DepthM > boreholeDepthM {
		c.Siting = SitingBorehole
	}
}

// The orientation codes of axes of which an azimuth without a dip tells nothing: those of
// a symmetric triaxial sensor, on edges of a cube that stands on a corner, and others that
// need not be level.
//
// Source: FDSN source identifiers (2023), orientation codes A, B, C; U, V, W; 1, 2, 3 (from
// memory). That 1 and 2 are level where nobody says otherwise is common practice.
const (
	triaxialCodes = "ABC"
	anyAxisCodes  = "UVW3"
)

// orient takes the direction from dip and azimuth, which are down from the
// horizontal and clockwise from north, else from the letters E, N and Z; other
// letters say nothing. A tilted sensor is refused.
func (c *mseedChannel) orient(e *fdsnxml.Channel) error {
	letter := c.id.Channel[len(c.id.Channel)-1:]
	byLetter := Orientation{}
	if strings.Contains("ENZ", letter) {
		byLetter, _ = direction(letter)
	}
	byLetter.Label = letter
	c.Orientation = byLetter
	dip := fdsnxml.Number{}
	if e != nil {
		dip = e.DipDeg
	}
	switch {
	case dip.Known:
		if err := c.byDip(dip.Value, e); err != nil {
			return err
		}
	case strings.Contains(triaxialCodes, letter):
		return refuse(0, c.id.String(), "orientation code %s is an axis of a symmetric triaxial sensor, neither horizontal nor vertical, and no dip is stated: "+mustBeTurned, letter)
	case e != nil && e.AzimuthDeg.Known && strings.Contains(anyAxisCodes, letter):
		c.warn("an azimuth of %g° and no dip: a channel %s need not be horizontal", e.AzimuthDeg.Value, letter)
		return nil
	}
	if e == nil || !e.AzimuthDeg.Known || c.Orientation.Axis == AxisVertical {
		return nil
	}
	c.Orientation.Axis, c.Orientation.AzimuthDeg = AxisHorizontal, Number(e.AzimuthDeg)
	if a := byLetter.AzimuthDeg; a.Known && math.Abs(math.Remainder(e.AzimuthDeg.Value-a.Value, 360)) > axisTolerance {
		c.warn("a channel %s with an azimuth of %g°: the azimuth taken", letter, e.AzimuthDeg.Value)
	}
	return nil
}

// byDip tells vertical from horizontal, and refuses a dip against the letter, since nobody
// knows which of the two is wrong. A vertical that is positive down is turned.
func (c *mseedChannel) byDip(dipDeg float64, e *fdsnxml.Channel) error {
	axis, err := axisOfDip(dipDeg)
	if err != nil {
		return refuse(0, c.id.String(), "%w", err)
	}
	o := &c.Orientation
	switch o.Axis {
	case axis:
	case AxisUnknown:
		o.Axis = axis
	default:
		return refuse(0, c.id.String(), "%s states a dip of %g°, %s, for a channel %s, which is %s: correct whichever is wrong",
			e.Place(), dipDeg, axisName(axis), o.Label, axisName(o.Axis))
	}
	if axis == AxisVertical && dipDeg > 0 {
		c.turned = !c.turned
	}
	warnDip(&c.Channel, dipDeg, axis)
	return nil
}
