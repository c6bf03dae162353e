package ingest

import (
	"bytes"
	"math"
	"strings"
	"time"
)

// knetHeader holds the values of the header lines, trimmed.
type knetHeader [knetHeaderLines]string

func readKNETHeader(t *Text) (*knetHeader, error) {
	var h knetHeader
	for i := range h {
		if i >= t.Len() {
			return nil, refuse(t.Len(), "header", "%d lines; the header has %d", t.Len(), knetHeaderLines)
		}
		value, ok := knetValue(t.Bytes(i+1), i)
		if !ok {
			return nil, refuse(i+1, "header", "expected %q, found %s", knetLabels[i][0], found(t.Line(i+1)))
		}
		h[i] = value
	}
	return &h, nil
}

// knetValue returns what follows label i at the beginning of line. Blanks and
// stops are not compared, since files of different years differ in them.
func knetValue(line []byte, i int) (string, bool) {
	for _, label := range knetLabels[i] {
		if rest, ok := afterLabel(line, label); ok {
			return string(bytes.TrimSpace(rest)), true
		}
	}
	return "", false
}

func afterLabel(line []byte, label string) ([]byte, bool) {
	at := 0
	for i := range len(label) {
		if label[i] == ' ' || label[i] == '.' {
			continue
		}
		for at < len(line) && (line[at] == ' ' || line[at] == '.' || line[at] == '\t') {
			at++
		}
		if at == len(line) || lower(line[at]) != lower(label[i]) {
			return nil, false
		}
		at++
	}
	if at < len(line) && line[at] == '.' {
		at++
	}
	if at < len(line) && isLetter(line[at]) {
		return nil, false // a longer word
	}
	return line[at:], true
}

func lower(b byte) byte {
	if 'A' <= b && b <= 'Z' {
		return b + 'a' - 'A'
	}
	return b
}

// number reads header line i, where blank is unknown.
func (h *knetHeader) number(i int) (Number, error) {
	if h[i] == "" {
		return Number{}, nil
	}
	v, ok := parseNumber([]byte(h[i]))
	if !ok {
		return Number{}, h.refuse(i, "expected a number, found %s", found(h[i]))
	}
	return Known(v), nil
}

func (h *knetHeader) refuse(i int, format string, args ...any) error {
	return refuse(i+1, knetLabels[i][0], format, args...)
}

// numbers reads several header lines into the places given.
func (h *knetHeader) numbers(into map[int]*Number) error {
	for i := range h { // in the order of the lines, so that the first fault is named
		place, ok := into[i]
		if !ok {
			continue
		}
		v, err := h.number(i)
		if err != nil {
			return err
		}
		*place = v
	}
	return nil
}

// time reads a stamp of Japan Standard Time; older files have no seconds.
func (h *knetHeader) time(i int) (time.Time, error) {
	if h[i] == "" {
		return time.Time{}, nil
	}
	for _, layout := range []string{"2006/01/02 15:04:05", "2006/01/02 15:04"} {
		if at, err := time.ParseInLocation(layout, h[i], japan); err == nil {
			return at.UTC(), nil
		}
	}
	return time.Time{}, h.refuse(i, "expected a time as YYYY/MM/DD HH:MM:SS, found %s", found(h[i]))
}

// describe reads the header into the channel, in the order of its lines but for
// the hints, and returns the number of samples it announces.
func (h *knetHeader) describe(c *Channel, hints Hints) (count int, err error) {
	if err := h.event(c); err != nil {
		return 0, err
	}
	if err := h.station(c); err != nil {
		return 0, err
	}
	if count, err = h.timing(c); err != nil {
		return 0, err
	}
	if err := h.direction(c); err != nil {
		return 0, err
	}
	if err := h.scale(c); err != nil {
		return 0, err
	}
	return count, h.hints(c, hints)
}

func (h *knetHeader) event(c *Channel) error {
	e := &c.Event
	err := h.numbers(map[int]*Number{
		knetLatitude: &e.Latitude, knetLongitude: &e.Longitude,
		knetDepth: &e.DepthKM, knetMagnitude: &e.Magnitude,
	})
	if err != nil {
		return err
	}
	if e.Magnitude.Known {
		e.MagnitudeType = "MJMA" // the agency's own scale, common practice
	}
	e.Origin, err = h.time(knetOrigin)
	return err
}

func (h *knetHeader) station(c *Channel) error {
	s := &c.Station
	s.Code = h[knetStation]
	err := h.numbers(map[int]*Number{
		knetStationLatitude: &s.Latitude, knetStationLongitude: &s.Longitude, knetHeight: &s.ElevationM,
	})
	if s.ElevationM.Value == knetNoHeight {
		s.ElevationM = Number{}
	}
	return err
}

// timing reads start and step and returns the number of samples announced.
func (h *knetHeader) timing(c *Channel) (count int, err error) {
	at, err := h.time(knetRecordTime)
	if err != nil {
		return 0, err
	}
	if at.IsZero() {
		c.warn("record time is blank: the time of the first sample is unknown")
	} else {
		c.Start = at.Add(-knetDelay)
	}
	rate, err := h.positive(knetRate, "Hz")
	if err != nil {
		return 0, err
	}
	duration, err := h.positive(knetDuration, "s")
	if err != nil {
		return 0, err
	}
	n := math.Round(rate * duration)
	if n < 1 || n > math.MaxInt32 {
		return 0, h.refuse(knetDuration, "%g Hz for %g s make no number of samples", rate, duration)
	}
	c.StepS = 1 / rate
	return int(n), nil
}

// positive reads a number over zero with its unit attached or not.
func (h *knetHeader) positive(i int, unit string) (float64, error) {
	text := h[i]
	if n := len(text) - len(unit); n >= 0 && strings.EqualFold(text[n:], unit) {
		text = strings.TrimSpace(text[:n])
	}
	v, ok := parseNumber([]byte(text))
	if !ok || v <= 0 {
		return 0, h.refuse(i, "expected a number over zero, found %s", found(h[i]))
	}
	return v, nil
}

func (h *knetHeader) direction(c *Channel) error {
	code := strings.ToUpper(h[knetDirection])
	d, ok := knetPlaces[code]
	if !ok {
		return h.refuse(knetDirection, "unknown direction %s; known are N-S, E-W, U-D and 1 to 6", found(h[knetDirection]))
	}
	c.Orientation, _ = direction(d.label)
	c.Instrument = d.place
	c.Siting = SitingFreeField
	if d.place != "" {
		c.ChannelCode = code
	}
	if d.place == "borehole" {
		c.Siting = SitingBorehole
		if c.Orientation.Axis == AxisHorizontal {
			c.warn("borehole sensor: its azimuth is nominal")
		}
	}
	return nil
}

// scale reads NUM(gal)/DEN: NUM gal are DEN counts.
func (h *knetHeader) scale(c *Channel) error {
	num, den, ok := strings.Cut(h[knetScale], "/")
	gal := "(gal)"
	n := len(strings.TrimSpace(num)) - len(gal)
	if !ok || n < 0 || !strings.EqualFold(strings.TrimSpace(num)[n:], gal) {
		return h.refuse(knetScale, "expected NUMBER(gal)/NUMBER, found %s", found(h[knetScale]))
	}
	a, okA := parseNumber([]byte(strings.TrimSpace(strings.TrimSpace(num)[:n])))
	b, okB := parseNumber([]byte(strings.TrimSpace(den)))
	if !okA || !okB {
		return h.refuse(knetScale, "expected NUMBER(gal)/NUMBER, found %s", found(h[knetScale]))
	}
	c.UnitMPS2 = a / (b * 100) // one rounding: b and its hundredfold are integers
	if !(a > 0) || !(b > 0) || !(c.UnitMPS2 > 0) || math.IsInf(c.UnitMPS2, 0) {
		return h.refuse(knetScale, "%s is not a scale over zero", found(h[knetScale]))
	}
	return nil
}

// hints holds what the user states against the header, which always states its
// step and its unit, the gal.
func (h *knetHeader) hints(c *Channel, hints Hints) error {
	if _, _, err := chooseUnit(statement{"gal", knetScale + 1}, hints); err != nil {
		return err
	}
	return checkStep(c.StepS, knetRate+1, hints)
}

// minPeakGal is the smallest peak of line 15 that is kept: below it 0.01 gal,
// within which peaks agree, is more than the fifth that check allows.
const minPeakGal = 0.05

// peak holds the samples against line 15, in which the network states the
// maximum after the mean is removed: they agree within 0.5 % or 0.01 gal, and
// beyond 5 % scale or samples are wrong.
func (h *knetHeader) peak(c *Channel) error {
	stated, err := h.number(knetPeak)
	if err != nil || !stated.Known {
		return err
	}
	peak := 0.0
	for _, a := range c.Acceleration {
		peak = max(peak, math.Abs(a))
	}
	peak *= 100 // gal
	if peak == 0 {
		return nil // a dead channel is refused as such
	}
	want := math.Abs(stated.Value)
	off := math.Abs(peak - want)
	if want >= minPeakGal {
		c.HeaderPeak = Known(want / 100)
	}
	switch {
	case off > max(0.05*want, 0.01):
		return h.refuse(knetPeak, "samples reach %.5g gal, the header says %.5g gal: wrong scale or damaged samples", peak, want)
	case off > max(0.005*want, 0.01):
		c.warn("samples reach %.5g gal, the header says %.5g gal", peak, want)
	}
	return nil
}
