package ingest

import (
	"bytes"
	"math"
	"slices"
	"strings"
)

// The keys of comments that decide what the numbers mean.
var (
	unitKeys = []string{"unit", "units"}
	stepKeys = []string{"dt", "time_step", "delta_t", "sampling_interval", "sample_interval", "time_increment",
		"dt_s", "time_step_s", "sampling_interval_s", "sample_interval_s", "time_increment_s"}
	rateKeys  = []string{"rate", "sampling_rate", "sample_rate", "sampling_frequency", "samples_per_second", "sps", "fs", "rate_hz", "sampling_rate_hz", "sampling_frequency_hz"}
	countKeys = []string{"npts", "points", "number_of_points", "samples", "number_of_samples", "count"}
	peakKeys  = []string{"pga", "peak", "peak_acceleration", "max_acceleration", "maximum_acceleration"}
)

// checkRepeats refuses comments that contradict each other in what decides the
// meaning of the numbers.
func (h *plainHead) checkRepeats() error {
	for _, keys := range [][]string{unitKeys, stepKeys, rateKeys, countKeys, peakKeys} {
		var first comment
		for _, c := range h.comments {
			switch {
			case !slices.Contains(keys, c.key):
			case first.line == 0:
				first = c
			case !sameStatement(first.value, c.value):
				return refuse(c.line, c.key, "%s here, %s in line %d", found(c.value), found(first.value), first.line)
			}
		}
	}
	return nil
}

// sameStatement reports whether two texts state the same unit, quantity or words.
func sameStatement(a, b string) bool {
	if strings.EqualFold(a, b) {
		return true
	}
	unitA, errA := ParseUnit(a)
	unitB, errB := ParseUnit(b)
	if errA == nil && errB == nil {
		return unitA.MPS2 == unitB.MPS2
	}
	v, inA, okA := quantity(a)
	w, inB, okB := quantity(b)
	return okA && okB && v == w && inA == inB
}

// setPeak takes the peak that a comment states, in the unit beside it or in that
// of the samples. It speaks of the file's only channel.
func (h *plainHead) setPeak(c *Channel) {
	s := h.stated(peakKeys...)
	if s.text == "" || isMissing(s.text) {
		return
	}
	v, name, ok := peakQuantity(s.text)
	if ok && (isMark(v) || v == -99) {
		return // no value
	}
	unit := Unit{MPS2: c.UnitMPS2}
	if name != "" {
		var err error
		unit, err = ParseUnit(name)
		ok = ok && err == nil
	}
	if !ok {
		c.warn("line %d: peak %s not understood", s.line, found(s.text))
		return
	}
	c.HeaderPeak = Known(math.Abs(v) * unit.MPS2)
}

// peakQuantity splits "0.31 g" or "-3.04 m/s2" into number and unit. The unit
// may hold digits, which quantity does not take.
func peakQuantity(text string) (v float64, unit string, ok bool) {
	number, unit, _ := strings.Cut(text, " ")
	if end := strings.LastIndexAny(number, "0123456789."); unit == "" && end >= 0 {
		v, unit, ok = quantity(text)
		return v, unit, ok
	}
	v, ok = parseNumber([]byte(number))
	return v, strings.TrimSpace(unit), ok
}

// wrapped reads lines of several values as one series, from left to right, where
// a count confirms that: a comment, or one whole number on the line before them.
// It returns nil where none does, where names say that the lines are rows, and
// where what begins the lines rises like a time.
func (h *plainHead) wrapped(t *Text, form numberForm) (*plainRows, error) {
	if columns, err := h.named(form); form.fields < 2 || columns != nil || err != nil {
		return nil, nil // columns says what is wrong with names
	}
	count, first := h.announced(t, form)
	if count == 0 {
		return nil, nil
	}
	reader := Layout{numbers: layoutNumbers{form: form}}
	reader.data.comment = []byte("#")
	series, err := reader.series(t, span{first, t.Len()}, -1)
	if err != nil || len(series.rows) == count {
		return nil, nil // rows, or what the reader of rows says better
	}
	begin := make([]float64, len(series.rows))
	for i, r := range series.rows {
		begin[i] = series.values[0][r.before]
	}
	switch got := series.len(); {
	case isMostlyEven(begin) || got != count && form.fields == 2:
		return nil, nil
	case got != count:
		return nil, refuse(series.line(got-1), "samples", "announced %d values, found %d in lines of %d", count, got, form.fields)
	}
	return &plainRows{values: series.values, resolution: []float64{1}, minus: series.minus, line: series.lines(), remarks: remarksIn(t, first), counted: true}, nil
}

// announced returns the number of values that a comment or the first line of
// numbers states, 0 where none does, and the line where values begin.
func (h *plainHead) announced(t *Text, form numberForm) (count, first int) {
	isCount := func(v float64) bool { return v == math.Trunc(v) && v > 0 && v < math.MaxInt32 }
	if v, ok := form.number(bytes.TrimSpace(t.Bytes(h.first)), nil); ok && isCount(v) {
		return int(v), nextText(t, h.first+1)
	}
	if v, unit, ok := quantity(h.stated(countKeys...).text); ok && unit == "" && isCount(v) {
		return int(v), h.first
	}
	return 0, h.first
}

// checkFirstValue refuses a single column whose first line looks like a count
// and is none: digits alone above numbers that are all written with decimals.
func checkFirstValue(t *Text, first int, rows *plainRows) error {
	if len(rows.values) > 1 {
		return nil
	}
	lines := headLines(t, first)
	if len(lines) < 2 || len(bytes.Trim(lines[0], "0123456789")) > 0 || rows.values[0][0] < MinSamples {
		return nil
	}
	for _, line := range lines[1:] {
		if !bytes.ContainsAny(line, ".,EeDd") {
			return nil
		}
	}
	return refuse(first, "samples", "%s looks like a count of the values below, and there are %d", found(string(lines[0])), len(rows.line)-1)
}

// timeUnit refuses a step of a time column without unit that can be one in
// seconds only by mistake.
func timeUnit(step float64, line int) error {
	const day = 86400
	switch {
	case step > MaxStepS && step <= MaxStepS*1000:
		return refuse(line, "time", "steps of %.6g in a column of times without unit: milliseconds? write time (ms) over it", step)
	case step < MinStepS && step*day >= MinStepS && step*day <= MaxStepS:
		return refuse(line, "time", "steps of %.6g in the time column: fractions of a day? give seconds", step)
	}
	return nil
}

// maxDurationS is the length in s above which a plain file is more likely a
// continuous recording than one of an earthquake.
const maxDurationS = 2 * 3600

// warnLength warns of a series that is longer than shaking lasts.
func warnLength(c *Channel) {
	if duration := float64(len(c.Acceleration)) * c.StepS; duration > maxDurationS {
		c.warn("%.3g hours long: a continuous recording?", duration/3600)
	}
}
