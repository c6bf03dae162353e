package ingest

import (
	"errors"
	"fmt"
	"math"
	"strings"
)

// Unit is a unit of acceleration. Name is its spelling in this package, MPS2
// the value of one of it in m/s².
type Unit struct {
	Name string
	MPS2 float64
}

// The units of acceleration that record files use, in the order in which
// messages list them. All factors are exact by definition; where the decimal is
// no float64, the constant is the float64 nearest to it.
//
// Sources: ISO 80000-3:2019, item 3-8.2 for g; SI brochure, 8th edition (2006),
// table 9 for the gal, 1 Gal = 1 cm/s²; NIST SP 811 (2008), appendix B for
// 1 in = 25.4 mm and 1 ft = 0.3048 m (all three from memory).
var units = []Unit{
	{"g", StandardGravity},
	{"mg", StandardGravity / 1000},
	{"m/s2", 1},
	{"cm/s2", 0.01},
	{"gal", 0.01},
	{"mm/s2", 0.001},
	{"in/s2", 0.0254},
	{"ft/s2", 0.3048},
}

// errCounts is the cause where a unit says that numbers are digitiser counts.
var errCounts = errors.New("raw counts need a scale; convert them to a unit of acceleration first")

// unitWords are the words that stand for a unit of acceleration on their own.
var unitWords = map[string]string{
	"g": "g", "g's": "g", "gs": "g", "gn": "g", "mg": "mg", "milli-g": "mg", "millig": "mg",
	"gal": "gal", "gals": "gal",
}

// lengthWords are the units of length that a unit of acceleration may begin
// with.
var lengthWords = map[string]string{
	"m": "m", "meter": "m", "meters": "m", "metre": "m", "metres": "m",
	"cm": "cm", "centimeter": "cm", "centimeters": "cm", "centimetre": "cm", "centimetres": "cm",
	"mm": "mm", "millimeter": "mm", "millimeters": "mm", "millimetre": "mm", "millimetres": "mm",
	"in": "in", "inch": "in", "inches": "in",
	"ft": "ft", "foot": "ft", "feet": "ft",
}

// unitSpelling reduces the ways to write "per second squared" to one. Longer
// words come first, since a Replacer tries its pairs in order.
var unitSpelling = strings.NewReplacer(
	"squared", "2", "per", "/", "seconds", "s", "second", "s", "secs", "s", "sec", "s",
	"⁻²", "-2", "−2", "-2", "²", "2", "^", "", "*", "", "·", "", ".", "", "(", "", ")", "",
	" ", "", "\t", "", "_", "",
)

// perSecondSquared are the ends of a unit of acceleration once unitSpelling has
// been through it; perSecond are those of a velocity.
var (
	perSecondSquared = []string{"/s/s", "/s2", "/ss", "ps2", "s-2"}
	perSecond        = []string{"/s", "s-1"}
)

// ParseUnit recognises a unit of acceleration: g, mg, m/s2, cm/s2, gal, mm/s2,
// in/s2 and ft/s2, in lower or upper case and in the usual spellings of the
// square of a second (m/s^2, m/s/s, m/s**2, m s-2, m/sec/sec). The whole text
// must be the unit: "G" is gravity, "Gal" is not. Counts, velocities and all
// else are errors that say so.
func ParseUnit(s string) (Unit, error) {
	text := strings.ToLower(strings.TrimSpace(s))
	if name, ok := unitWords[strings.TrimRight(text, ".")]; ok {
		return unitNamed(name), nil
	}
	switch strings.TrimRight(text, ".") {
	case "":
		return Unit{}, errors.New("unit is empty")
	case "count", "counts", "cts", "digital counts":
		return Unit{}, errCounts
	}
	text = unitSpelling.Replace(text)
	if name, ok := cutUnit(text, perSecondSquared); ok {
		return unitNamed(name + "/s2"), nil
	}
	if _, ok := cutUnit(text, perSecond); ok {
		return Unit{}, fmt.Errorf("%s is a unit of velocity, not of acceleration", found(s))
	}
	if _, ok := lengthWords[text]; ok {
		return Unit{}, fmt.Errorf("%s is a unit of length, not of acceleration", found(s))
	}
	return Unit{}, fmt.Errorf("unknown unit %s; known are %s", found(s), unitNames())
}

// IsCounts reports whether a unit says that numbers are digitiser counts.
func IsCounts(unit string) bool {
	_, err := ParseUnit(unit)
	return errors.Is(err, errCounts)
}

// cutUnit returns the length that text names before one of the ends.
func cutUnit(text string, ends []string) (string, bool) {
	for _, end := range ends {
		if length, ok := strings.CutSuffix(text, end); ok {
			if name, ok := lengthWords[length]; ok {
				return name, true
			}
		}
	}
	return "", false
}

func unitNamed(name string) Unit {
	for _, u := range units {
		if u.Name == name {
			return u
		}
	}
	return Unit{} // unreachable: unitWords and lengthWords name entries of units
}

func unitNames() string {
	names := make([]string, len(units))
	for i, u := range units {
		names[i] = u.Name
	}
	return strings.Join(names, ", ")
}

// statement is what a file says of a quantity and the line that says it; the
// zero value is silence.
type statement struct {
	text string
	line int
}

// chooseUnit returns the unit of a file that states stated, where hints may
// state one as well. A silent file takes the hint; two that agree in size are
// the file's; two that disagree, and none at all, are errors. A unit that only
// the file writes so, and nobody knows, gives way with a warning to a hint for
// this file, except for counts, which no unit makes into accelerations.
func chooseUnit(stated statement, hints Hints) (unit Unit, warning string, err error) {
	if stated.text == "" && hints.Unit == "" {
		return Unit{}, "", refuse(0, "unit", "the file states no unit: give it with --unit or in the catalogue's unit column")
	}
	var hint Unit
	if hints.Unit != "" && (stated.text == "" || !hints.UnitForAll) {
		if hint, err = ParseUnit(hints.Unit); err != nil {
			return Unit{}, "", refuse(0, "unit", "from %s: %w", orElse(hints.UnitFrom, "hint"), err)
		}
	}
	if stated.text == "" {
		return hint, "", nil
	}
	unit, err = ParseUnit(stated.text)
	switch {
	case err != nil && (hints.Unit == "" || hints.UnitForAll || errors.Is(err, errCounts)):
		return Unit{}, "", refuse(stated.line, "unit", "%w", err)
	case err != nil:
		return hint, fmt.Sprintf("line %d: unit %s not used, %s from %s taken", stated.line,
			found(stated.text), hint.Name, orElse(hints.UnitFrom, "hint")), nil
	case hints.UnitForAll:
		return unit, "", nil
	case hints.Unit != "" && hint.MPS2 != unit.MPS2:
		return Unit{}, "", refuse(stated.line, "unit", "the file says %s, %s says %s",
			unit.Name, orElse(hints.UnitFrom, "the hint"), hint.Name)
	}
	return unit, "", nil
}

// stepAgreement is how far two statements of a time step may differ, relative:
// headers round it.
const stepAgreement = 1e-3

// checkStep compares the step in s that line says with the one in the hints.
func checkStep(step float64, line int, hints Hints) error {
	if hints.StepS == 0 || hints.StepForAll || math.Abs(step-hints.StepS) <= stepAgreement*math.Abs(step) {
		return nil
	}
	return refuse(line, "dt", "the file says %.6g s, %s says %.6g s", step, orElse(hints.StepFrom, "the hint"), hints.StepS)
}

func orElse(s, other string) string {
	if s == "" {
		return other
	}
	return s
}
