package query

import (
	"math/big"
	"slices"
	"strconv"
	"strings"
)

// StandardGravity is g in m/s², exact by convention: 3rd General Conference on
// Weights and Measures, 1901, resolution 2.
const StandardGravity = 9.80665

// unit is a unit's name and the exact value of one of it in SI, as a decimal or
// a fraction.
type unit struct {
	name string
	si   string
}

// Exact values: inch 0.0254 m, foot 0.3048 m, pound 0.45359237 kg, pound-force
// 0.45359237·9.80665 N = 4.4482216152605 N, kip 1000 pound-force, tonne
// 1000 kg.
//
// Source: NIST Special Publication 811 (2008), appendix B, where these are
// printed bold as exact.
var (
	timeUnits = []unit{{"s", "1"}, {"ms", "0.001"}}

	lengthUnits = []unit{{"m", "1"}, {"cm", "0.01"}, {"mm", "0.001"}, {"ft", "0.3048"}, {"in", "0.0254"}}

	massUnits = []unit{
		{"kg", "1"}, {"t", "1000"}, {"Mg", "1000"},
		{"lb", "0.45359237"}, {"lbm", "0.45359237"},
	}

	forceUnits = []unit{
		{"N", "1"}, {"kN", "1000"}, {"MN", "1000000"},
		{"kgf", "9.80665"}, {"tf", "9806.65"},
		{"lbf", "4.4482216152605"}, {"lb", "4.4482216152605"},
		{"kip", "4448.2216152605"}, {"kips", "4448.2216152605"},
	}

	stiffnessUnits = []unit{
		{"N/m", "1"}, {"kN/m", "1000"}, {"MN/m", "1000000"},
		{"N/mm", "1000"}, {"kN/mm", "1000000"}, {"N/cm", "100"}, {"kN/cm", "100000"},
		{"lbf/in", "4.4482216152605/0.0254"}, {"lb/in", "4.4482216152605/0.0254"},
		{"lbf/ft", "4.4482216152605/0.3048"}, {"lb/ft", "4.4482216152605/0.3048"},
		{"kip/in", "4448.2216152605/0.0254"}, {"kip/ft", "4448.2216152605/0.3048"},
	}
)

// ParsePeriod reads a period such as "1.35s" or "800 ms" and returns s.
func ParsePeriod(text string) (float64, error) { return parsePositive("period", text, timeUnits) }

// ParseLength reads a length such as "5.2m" or "14 ft" and returns m.
func ParseLength(text string) (float64, error) { return parsePositive("height", text, lengthUnits) }

// ParseMass reads a mass such as "4100 kg", "4.1t" or "7000 lb" and returns kg.
// "lb" here is the pound of mass.
func ParseMass(text string) (float64, error) { return parsePositive("mass", text, massUnits) }

// ParseWeight reads a weight such as "260kN", "58 kip" or "250 lb" and returns N.
// "lb" here is the pound-force.
func ParseWeight(text string) (float64, error) { return parsePositive("weight", text, forceUnits) }

// ParseStiffness reads a stiffness such as "2.4 kN/mm" or "14 kip/in" and
// returns N/m. "lb" here is the pound-force.
func ParseStiffness(text string) (float64, error) {
	return parsePositive("stiffness", text, stiffnessUnits)
}

// parsePositive reads a number > 0 with one of the units and returns it in SI,
// rounded once from the exact product.
func parsePositive(what, text string, units []unit) (float64, error) {
	number, rest, err := splitNumber(what, text)
	if err != nil {
		return 0, err
	}
	name := strings.Join(strings.Fields(rest), "")
	at := slices.IndexFunc(units, func(u unit) bool { return u.name == name })
	if at < 0 {
		return 0, unknownUnit(what, text, name, units)
	}
	x, _ := new(big.Rat).Mul(number, exactUnit(units[at].si)).Float64()
	return x, checkPositive(what, text, x)
}

func unknownUnit(what, text, name string, units []unit) error {
	var names []string
	for _, u := range units {
		names = append(names, u.name)
	}
	accepted := strings.Join(names, ", ")
	if name == "" {
		return usage(what, "%q has no unit; write one of %s behind the number", text, accepted)
	}
	return usage(what, "unknown unit %q in %q; accepted: %s", name, text, accepted)
}

func checkPositive(what, text string, x float64) error {
	if !(x > 0) || x > 1e300 {
		return usage(what, "%q is not a positive number in range", text)
	}
	return nil
}

// exactUnit reads a constant of this file.
func exactUnit(si string) *big.Rat {
	above, below, isRatio := strings.Cut(si, "/")
	x, ok := new(big.Rat).SetString(above)
	if !ok {
		panic("query: unit value " + si)
	}
	if isRatio {
		y, ok := new(big.Rat).SetString(below)
		if !ok {
			panic("query: unit value " + si)
		}
		x.Quo(x, y)
	}
	return x
}

// maxNumberText bounds the digits of a number, since exact arithmetic costs by
// the digit.
const maxNumberText = 40

// splitNumber reads the decimal number at the start of text exactly and returns
// it with what follows.
func splitNumber(what, text string) (number *big.Rat, rest string, err error) {
	trimmed := strings.TrimSpace(text)
	n := numberLength(trimmed)
	if n == 0 || n > maxNumberText {
		return nil, "", usage(what, "%q does not start with a number such as 1.35 (decimal point, no thousands separators)", text)
	}
	// The range is checked first: an exact 1e999999999 would fill the memory.
	x, err := strconv.ParseFloat(trimmed[:n], 64)
	if err != nil {
		return nil, "", usage(what, "%q is out of range", text)
	}
	if x == 0 {
		return new(big.Rat), trimmed[n:], nil
	}
	number, ok := new(big.Rat).SetString(trimmed[:n])
	if !ok {
		return nil, "", usage(what, "%q does not start with a number", text)
	}
	return number, trimmed[n:], nil
}

// numberLength returns the length of the decimal number at the start of s, 0
// where there is none: sign, digits with at most one point, and an exponent
// where digits follow its letter.
func numberLength(s string) int {
	i := signLength(s)
	whole := digitsLength(s[i:])
	i += whole
	fraction := 0
	if strings.HasPrefix(s[i:], ".") {
		fraction = digitsLength(s[i+1:])
		i += 1 + fraction
	}
	if whole+fraction == 0 {
		return 0
	}
	if i < len(s) && (s[i] == 'e' || s[i] == 'E') {
		sign := signLength(s[i+1:])
		if n := digitsLength(s[i+1+sign:]); n > 0 {
			i += 1 + sign + n
		}
	}
	return i
}

func signLength(s string) int {
	if s != "" && (s[0] == '+' || s[0] == '-') {
		return 1
	}
	return 0
}

func digitsLength(s string) int {
	n := 0
	for n < len(s) && '0' <= s[n] && s[n] <= '9' {
		n++
	}
	return n
}
