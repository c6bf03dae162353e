package ingest

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"regexp"
)

const (
	// markDigits is how many nines at least make a mark for a missing value.
	markDigits = 3
	// markDecimals is how many of them may be decimals.
	markDecimals = 6
	// aloneMark and severalMarks are how many times a mark must exceed all other
	// values where it occurs once, and where it occurs more often.
	aloneMark    = 3
	severalMarks = 2
)

// markError is a value that stands for a missing one.
type markError struct {
	value float64 // in the file's unit
	count int
	first int // index of the first
}

// Error says which value it is.
func (e *markError) Error() string {
	if e.count == 1 {
		return fmt.Sprintf("value %.10g is apart from all others: a mark for a missing value?", e.value)
	}
	return fmt.Sprintf("value %.10g occurs %d times, first as value %d, apart from all others: a mark for missing values?", e.value, e.count, e.first+1)
}

// isMark reports whether v is written with nines alone, markDigits of them at least
// and not more than a float64 tells apart: 999, -9999, 999.9, 9999.999.
func isMark(v float64) bool {
	v = math.Abs(v)
	if v < 9 || v > 1e9 {
		return false
	}
	for range markDecimals + 1 {
		nines := math.Round(v)
		if nines >= math.Pow10(markDigits)-1 && math.Abs(v-nines) <= 1e-11*v {
			return isPowerOfTen(nines + 1)
		}
		v *= 10
	}
	return false
}

func isPowerOfTen(v float64) bool { return v == math.Pow10(int(math.Round(math.Log10(v)))) }

// checkMarks refuses a series whose least or greatest sample is, in the file's unit, a
// number by which tables mark missing values, and far from all samples that are none.
// Only a text writes one: of samples in binary a single one may be a spike, of which
// flagQuality warns.
//
// The rule is common practice.
func checkMarks(c *Channel, low, high float64) error {
	extreme := high
	if -low > high {
		extreme = low
	}
	if c.UnitMPS2 == 0 || !isMark(extreme/c.UnitMPS2) {
		return nil
	}
	mark := &markError{value: extreme / c.UnitMPS2}
	rest := 0.0
	for i, a := range c.Acceleration {
		switch {
		case a == extreme:
			if mark.count++; mark.count == 1 {
				mark.first = i
			}
		case math.Abs(a) > rest && !isMark(a/c.UnitMPS2):
			rest = math.Abs(a)
		}
	}
	ratio := severalMarks
	if mark.count == 1 {
		ratio = aloneMark
	}
	if mark.count == 1 && c.Line == 0 || math.Abs(extreme) < float64(ratio)*rest {
		return nil
	}
	return &ParseError{Line: c.Line, Field: "samples", Err: mark}
}

// placeMark gives the refusal of a mark the line in which it stands.
func placeMark(err *ParseError, t *Text) {
	mark, ok := errors.AsType[*markError](err)
	if !ok || err.Line == 0 {
		return
	}
	for n := err.Line; n <= t.Len(); n++ {
		if holdsMark(t.Bytes(n), mark.value) {
			err.Line = n
			return
		}
	}
}

// nines finds what may be a mark, with what stands before it.
var nines = regexp.MustCompile(`(^|[^0-9.])([-−]?)(9+)([.,]9*)?`)

// holdsMark looks for a mark in a line, whatever separates its numbers. A comma before
// the nines marks decimals in a line without points that has other separators.
func holdsMark(line []byte, mark float64) bool {
	size := math.Abs(mark)
	for _, f := range numberFields(line) {
		if v, ok := parseNumber(line[f.from:f.to]); ok && math.Abs(v-mark) <= 1e-9*size {
			return true
		}
	}
	commas := !bytes.Contains(line, []byte(".")) && bytes.ContainsAny(line, "; \t")
	for _, m := range nines.FindAllSubmatch(line, -1) {
		if commas && string(m[1]) == "," || (len(m[2]) > 0) != (mark < 0) {
			continue
		}
		whole, _ := parseNumber(m[3])
		v, _ := parseNumber(append(bytes.Clone(m[3]), bytes.Replace(m[4], []byte(","), []byte("."), 1)...))
		if math.Abs(v-size) <= 1e-9*size || math.Abs(whole-size) <= 1e-9*size {
			return true
		}
	}
	return false
}
