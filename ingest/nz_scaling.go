package ingest

import (
	"fmt"
	"math"
	"regexp"
)

var (
	nzPoints   = regexp.MustCompile(`(?i)\bnumber of points\s*[:=]?\s*(\d+)`)
	nzDuration = regexp.MustCompile(`(?i)\bduration\s*[:=]?\s*(\d*\.?\d+)\s*s`)
	nzInterval = regexp.MustCompile(`(?i)\bintervals? of\s*([-+.\dE]+)\s*s`)
	nzUnit     = regexp.MustCompile(`(?i)\bunits? of\s+(?:([-+.\dE]*\d[-+.\dE]*)\s+)?(.+)`)
	nzPeak     = regexp.MustCompile(`(?i)\bpeak\b[^-+.\d]*([-+]?\d*\.?\d+)\s*mm/s/s`)
	// nzOfAcceleration are the words of a line whose interval is that of the
	// series, not of a raw record behind it.
	nzOfAcceleration = regexp.MustCompile(`(?i)\bacceleration\b|\bnumber of points\b|mm/s/s`)
)

// scaling takes step, unit and peak of the text and compares count and duration
// with integer 34, which is count.
func (h *nzHeading) scaling(c *Channel, count int, hints Hints) error {
	if m, line := h.find(nzPoints); m != nil {
		if n, ok := valueCount(m[1]); !ok || n != count {
			return refuse(line, "accel count", "number of points is %s, %s in line %d says %d", m[1], h.integers.what(34), h.integers.line(34), count)
		}
	}
	step, err := h.interval()
	if err != nil {
		return err
	}
	c.StepS = step.value
	if err := checkStep(step.value, step.line, hints); err != nil {
		return err
	}
	if err := h.compareDuration(step, count); err != nil {
		return err
	}
	if err := h.unit(c, hints); err != nil {
		return err
	}
	if m, _ := h.find(nzPeak); m != nil {
		c.HeaderPeak = Known(math.Abs(decimal(m[1])) / 1000)
	}
	return nil
}

// interval returns the time step of the text. Of two that differ the one on a
// line about acceleration is that of the series.
func (h *nzHeading) interval() (printed, error) {
	var steps, own []printed
	for n := 1; n <= nzTextLines; n++ {
		s := h.line(n)
		m := nzInterval.FindStringSubmatch(s)
		if m == nil {
			continue
		}
		p, err := newPrinted(m[1], h.at(n), "dt")
		if err != nil {
			return printed{}, err
		}
		steps = append(steps, p)
		if nzOfAcceleration.MatchString(s) {
			own = append(own, p)
		}
	}
	if len(own) > 0 {
		steps = own
	}
	if len(steps) == 0 {
		return printed{}, refuse(h.first, "dt", "the heading has no line with the interval between samples")
	}
	return finest(steps)
}

// compareDuration holds count and step to the duration of the text within 1 %,
// or a step and a half where that is more.
func (h *nzHeading) compareDuration(step printed, count int) error {
	m, line := h.find(nzDuration)
	if m == nil {
		return nil
	}
	duration, err := newPrinted(m[1], line, "duration")
	if err != nil {
		return err
	}
	slack := max(float64(0.01*duration.value), float64(1.5*step.value)) + duration.half
	if math.Abs(float64(float64(count-1)*step.value)-duration.value) > slack {
		return refuse(line, "dt", "%d values every %g s do not last %g s", count, step.value, duration.value)
	}
	return nil
}

// unit reads the factor and the unit, which is mm/s².
func (h *nzHeading) unit(c *Channel, hints Hints) error {
	m, line := h.find(nzUnit)
	if m == nil {
		return refuse(h.first, "unit", "the heading has no line with the unit of the samples")
	}
	text := unitToken(m[2])
	own, err := ParseUnit(text)
	if err != nil {
		return refuse(line, "unit", "%w", err)
	}
	if own.Name != "mm/s2" {
		return refuse(line, "unit", "acceleration is in %s; files of this layout are in mm/s2", own.Name)
	}
	factor := 1.0
	if m[1] != "" {
		if factor = decimal(m[1]); !(factor > 0) {
			return refuse(line, "unit", "factor %s is not a number over zero", found(m[1]))
		}
	}
	if _, _, err = chooseUnit(statement{text, line}, hints); err != nil {
		return err
	}
	c.Unit, c.UnitMPS2 = own.Name, factor*own.MPS2
	if factor != 1 {
		c.Unit = fmt.Sprintf("%g %s", factor, own.Name)
	}
	if !(c.UnitMPS2 > 0) || math.IsInf(c.UnitMPS2, 0) {
		return refuse(line, "unit", "factor %s is out of range", found(m[1]))
	}
	return nil
}
