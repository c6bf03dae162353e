package ingest

import (
	"errors"
	"fmt"
	"math"
	"regexp"
	"strings"
)

// cosmosData is what the start line of a section's data says.
type cosmosData struct {
	line     int
	count    int
	quantity string // "" where the line does not say
	unit     string // "" where the line does not say
	code     Number // of the unit
	rate     Number // samples per second
	format   string
	layout   fieldLayout
}

var (
	cosmosDataLine = regexp.MustCompile(`(?i)^\s*\d+\s+[a-z][^|]*\b(?:units|format)\b`)
	cosmosCount    = regexp.MustCompile(`^\s*(\d+)`)
	cosmosUnits    = regexp.MustCompile(`(?i)\bunits?\s*=?\s*([^\s,()]+)`)
	cosmosUnitCode = regexp.MustCompile(`(?i)\bunits?\s*=?\s*[^\s,()]*\s*\(\s*(\d+)\s*\)`)
	cosmosRate     = regexp.MustCompile(`(?i)\bat\s+(\S+)\s*(?:pts|points|samples)\s*/\s*sec`)
	cosmosFormat   = regexp.MustCompile(`(?i)\bformat\s*=?\s*(\([^()]*\)|[0-9a-z.]+)`)
)

// readCosmosData reads the start line of the data.
func readCosmosData(t *Text, line int) (*cosmosData, error) {
	text := words(t, line)
	if !isCosmosDataLine(text) {
		if line > t.Len() {
			return nil, refuse(t.Len(), "data line", "truncated: the file ends before the data")
		}
		return nil, refuse(line, "data line", "expected the count, unit and format of the values, found %s", found(text))
	}
	d := &cosmosData{line: line, quantity: quantityFromWords(text)}
	var ok bool
	if d.count, ok = valueCount(cosmosCount.FindStringSubmatch(text)[1]); !ok || d.count < 1 {
		return nil, refuse(line, "data line", "%s is not a count of values", found(strings.TrimSpace(text)))
	}
	if m := cosmosUnits.FindStringSubmatch(text); m != nil {
		d.unit = m[1]
	}
	if m := cosmosUnitCode.FindStringSubmatch(text); m != nil {
		d.code = Known(decimal(m[1]))
	}
	if m := cosmosRate.FindStringSubmatch(text); m != nil {
		v, ok := parseNumber([]byte(m[1]))
		if !ok || v <= 0 {
			return nil, refuse(line, "dt", "sampling rate %s is not a positive number", found(m[1]))
		}
		d.rate = Known(v)
	}
	m := cosmosFormat.FindStringSubmatch(text)
	if m == nil {
		return nil, refuse(line, "data line", "no format of the values is stated")
	}
	d.format = m[1]
	var err error
	if d.layout, err = parseFortran(m[1]); err != nil {
		return nil, refuse(line, "data line", "%w", err)
	}
	return d, nil
}

// isCosmosDataLine reports whether s is the start line of data, which the start
// lines of the numeric headers resemble.
func isCosmosDataLine(s string) bool {
	return cosmosDataLine.MatchString(s) && !cosmosNumbers.MatchString(s) && !cosmosRemarks.MatchString(s)
}

// quantityFromWords finds the quantity that a line names, "" where none.
func quantityFromWords(s string) string {
	s = strings.ToLower(s)
	switch {
	case strings.Contains(s, "spectr"):
		return quantitySpectra
	case strings.Contains(s, "rotation") || strings.Contains(s, "angular"):
		return quantityOther
	case strings.Contains(s, "accel"):
		return quantityAcceleration
	case strings.Contains(s, "veloc"):
		return quantityVelocity
	case strings.Contains(s, "displ"):
		return quantityDisplacement
	}
	return ""
}

// cosmosUnitNames are the units of acceleration by their codes. Codes 2, 4, 7, 10,
// 11 and 12 are confirmed by published field maps; pairs with a time cannot be
// read.
var cosmosUnitNames = map[int]Unit{
	2:  {"g", StandardGravity},
	4:  {"cm/s2", 0.01},
	7:  {"in/s2", 0.0254},
	10: {"gal", 0.01},
	11: {"mg", StandardGravity / 1000},
	12: {microG, StandardGravity / 1e6},
}

// cosmosCounts is the unit code of raw counts, and countsUnit how this package
// spells them; voltsUnit and millivoltsUnit are how it spells the other outputs.
const (
	cosmosCounts   = 50
	countsUnit     = "counts"
	voltsUnit      = "volts"
	millivoltsUnit = "millivolts"
)

// cosmosOutputs are the units of what a recorder puts out, by their codes. They
// have no size before the calibration is known. Codes 50 to 52 are confirmed by
// published field maps.
var cosmosOutputs = map[int]string{cosmosCounts: countsUnit, 51: voltsUnit, 52: millivoltsUnit}

// outputWords are the spellings of those units in words.
var outputWords = map[string]string{
	"count": countsUnit, countsUnit: countsUnit, "v": voltsUnit, "volt": voltsUnit, voltsUnit: voltsUnit,
	"mv": millivoltsUnit, "millivolt": millivoltsUnit, millivoltsUnit: millivoltsUnit,
}

// convert settles step and unit of a channel whose values have been read, and
// turns these into m/s².
func (h *cosmosHeader) convert(c *Channel, d *cosmosData, hints Hints) error {
	var err error
	if c.StepS, err = h.step(c, d, hints); err != nil {
		return err
	}
	unit, err := h.unit(c, d, hints)
	if err != nil {
		return err
	}
	if unit.MPS2 == 0 {
		if unit.MPS2, err = h.calibration(unit.Name, d.line); err != nil {
			return err
		}
		centre(c.Acceleration)
		c.Processing = ProcessingMeanRemoved
		// The stated peak is from zero, not from the mean.
		c.HeaderPeak = Number{}
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	scale(c.Acceleration, unit.MPS2)
	c.HeaderPeak.Value *= unit.MPS2
	return nil
}

// unit returns the unit that the data line and integer 3 state. Text and codes
// must mean the same size; a micro-g is known by its code only. What a recorder
// puts out comes back with no size.
func (h *cosmosHeader) unit(c *Channel, d *cosmosData, hints Hints) (Unit, error) {
	coded, err := h.codedUnit(d)
	if err != nil {
		return Unit{}, err
	}
	named := strings.ToLower(d.unit)
	output := outputWords[named]
	if named == "" && coded.MPS2 == 0 {
		output = coded.Name
	}
	switch {
	case output != "":
		if coded.Name != "" && coded.Name != output {
			return Unit{}, refuse(d.line, "unit", "the text says %s, the code says %s", output, coded.Name)
		}
		return Unit{Name: output}, unlessHinted(output, d, hints)
	case coded.Name == microG && microGText[named]:
		return coded, unlessHinted(microG, d, hints)
	case named == "":
		named = coded.Name
	}
	unit, warning, err := chooseUnit(statement{named, d.line}, hints)
	if pe, ok := errors.AsType[*ParseError](err); ok && pe.Line == 0 {
		pe.Line = d.line
	}
	if err != nil {
		return Unit{}, err
	}
	if coded.Name != "" && coded.MPS2 != unit.MPS2 {
		return Unit{}, refuse(d.line, "unit", "the text says %s, the code says %s", unit.Name, coded.Name)
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	return unit, nil
}

// unlessHinted refuses a hint beside a unit that no hint can state.
func unlessHinted(name string, d *cosmosData, hints Hints) error {
	if hints.Unit == "" || hints.UnitForAll {
		return nil
	}
	return refuse(d.line, "unit", "the file says %s, %s says %s", name, orElse(hints.UnitFrom, "the hint"), hints.Unit)
}

// microG is the unit that only COSMOS files use, and microGText its spellings.
const microG = "micro-g"

var microGText = map[string]bool{"": true, "microg": true, "micro-g": true, "ug": true, "µg": true}

// codedUnit returns the unit of the codes in the data line and in integer 3, the
// zero Unit where neither is stated.
func (h *cosmosHeader) codedUnit(d *cosmosData) (Unit, error) {
	coded := Unit{}
	for _, code := range []struct {
		n    Number
		what string
	}{{d.code, "the data line"}, {h.integer(3), "integer 3"}} {
		if !code.n.Known {
			continue
		}
		u, err := unitOfCode(code.n.Value)
		switch {
		case err != nil:
			return Unit{}, refuse(d.line, "unit", "%s: %w", code.what, err)
		case coded.Name != "" && (coded.MPS2 != u.MPS2 || u.MPS2 == 0 && coded.Name != u.Name):
			return Unit{}, refuse(d.line, "unit", "the data line's code says %s, integer 3 says %s", coded.Name, u.Name)
		}
		coded = u
	}
	return coded, nil
}

// calibration returns the value of one count, volt or millivolt in m/s²,
//
//	size · 10⁻⁶ / (sensitivity · gain) · g,
//
// with its size in microvolts, for a count that of real 22, the sensor's volts
// per g (real 42) and the gain (real 47, 1 where not stated). Without the first
// two the numbers mean nothing.
func (h *cosmosHeader) calibration(output string, line int) (float64, error) {
	size, sensitivity, gain := Known(1e6), h.real(42), h.real(47).Or(Known(1))
	switch output {
	case countsUnit:
		size = h.real(22)
	case millivoltsUnit:
		size = Known(1e3)
	}
	for _, q := range []struct {
		n    Number
		what string
	}{{size, "microvolts per count (real 22)"}, {sensitivity, "volts per g (real 42)"}, {gain, "gain (real 47)"}} {
		if !(q.n.Value > 0) {
			return 0, refuse(line, "calibration", "raw %s without a positive %s cannot be scaled", output, q.what)
		}
	}
	return size.Value * 1e-6 / (sensitivity.Value * gain.Value) * StandardGravity, nil
}

// centre takes the mean of x from its values. Counts are integers, so that
// their sum is exact.
func centre(x []float64) {
	sum := 0.0
	for _, v := range x {
		sum += v
	}
	mean := sum / float64(len(x))
	for i := range x {
		x[i] -= mean
	}
}

// unitOfCode returns the unit of acceleration, or of a recorder's output, of a
// code.
func unitOfCode(code float64) (Unit, error) {
	if code == math.Trunc(code) {
		if output, ok := cosmosOutputs[int(code)]; ok {
			return Unit{Name: output}, nil
		}
		if u, ok := cosmosUnitNames[int(code)]; ok {
			return u, nil
		}
	}
	return Unit{}, fmt.Errorf("unit code %g is none of acceleration", code)
}
