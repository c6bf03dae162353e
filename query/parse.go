package query

import (
	"math/big"
	"slices"
	"strconv"
	"strings"

	"swaybook/pipeline/spectrum"
)

// Method is a way of solving the oscillator's equation.
type Method = spectrum.Method

// ParseMethod reads a solver's name: "nigam-jennings", "newmark-average" or
// "newmark-linear". The empty text gives the first, by which stores are computed.
func ParseMethod(text string) (Method, error) {
	if text == "" {
		return defaultMethod, nil
	}
	m, err := spectrum.ParseMethod(text)
	if err != nil {
		return m, &UsageError{What: "method", Why: err.Error(), Err: err}
	}
	return m, nil
}

// ParseDamping reads a damping ratio, "5%" or "0.05", and returns the ratio.
func ParseDamping(text string) (float64, error) {
	zeta, err := parseRatio("damping", text)
	if err != nil {
		return 0, err
	}
	return zeta, checkDamping(zeta)
}

func checkDamping(zeta float64) error {
	if !(zeta >= 0 && zeta < 1) {
		return usage("damping", "%v is %v of critical; it must be at least 0 and less than 1, written 5%% or 0.05", zeta, percentText(zeta))
	}
	return nil
}

// ParseDampings reads damping ratios separated by commas. The empty text gives
// nil, which stands for all that are stored.
func ParseDampings(text string) ([]float64, error) { return parseList(text, ParseDamping) }

// ParseBandWidth reads the half-width of a band of periods round a structure's,
// "10%" or "0.1", as a ratio. The empty text gives 0, no band.
func ParseBandWidth(text string) (float64, error) {
	if strings.TrimSpace(text) == "" {
		return 0, nil
	}
	width, err := parseRatio("band", text)
	if err != nil {
		return 0, err
	}
	return width, checkBandWidth(width)
}

func checkBandWidth(width float64) error {
	if !(width >= 0 && width < 1) {
		return usage("band", "%v is out of range; the half-width is a ratio of the period below 1, written 10%% or 0.1", width)
	}
	return nil
}

// ParsePercentiles reads percentiles such as "16,50,84", each from 0 to 100. A
// repeated one counts once.
func ParsePercentiles(text string) ([]float64, error) {
	list, err := parseList(text, func(item string) (float64, error) {
		p, err := parsePlain("percentiles")(item)
		if err != nil {
			return 0, err
		}
		return p, checkPercentile(p)
	})
	return uniqueInOrder(list), err
}

// parsePlain reads a number without a unit.
func parsePlain(what string) func(string) (float64, error) {
	return func(text string) (float64, error) {
		x, rest, err := splitNumber(what, text)
		if err != nil {
			return 0, err
		}
		if strings.TrimSpace(rest) != "" {
			return 0, usage(what, "%q is not a plain number", text)
		}
		plain, _ := x.Float64()
		return plain, nil
	}
}

func checkPercentile(p float64) error {
	if !(p >= 0 && p <= 100) {
		return usage("percentiles", "%v is outside 0 to 100", p)
	}
	return nil
}

// ParsePeriods reads periods separated by commas: "0.2,0.5s,800ms". A bare
// number is in s. The empty text gives nil, which stands for the grid.
func ParsePeriods(text string) ([]float64, error) { return parseList(text, parseSeconds) }

// Band is a closed range of periods in s. A zero end is open.
type Band struct {
	FromS, ToS float64
}

// Contains reports whether the period is in the band.
func (b Band) Contains(periodS float64) bool {
	return periodS >= b.FromS && (b.ToS == 0 || periodS <= b.ToS)
}

// ParseBand reads a range of periods "FROM:TO", for example "0.1:2" or
// "100ms:2s". A bare number is in s; either end may be left empty. The empty
// text gives the band open at both ends.
func ParseBand(text string) (Band, error) {
	var b Band
	if strings.TrimSpace(text) == "" {
		return b, nil
	}
	from, to, ok := strings.Cut(text, ":")
	if !ok {
		return b, usage("band", "%q is not FROM:TO, for example 0.1:2", text)
	}
	var err error
	if strings.TrimSpace(from) != "" {
		if b.FromS, err = parseSeconds(from); err != nil {
			return b, err
		}
	}
	if strings.TrimSpace(to) != "" {
		if b.ToS, err = parseSeconds(to); err != nil {
			return b, err
		}
	}
	return b, b.validate()
}

func (b Band) validate() error {
	if !(b.FromS >= 0 && b.ToS >= 0) || b.ToS > 0 && b.FromS > b.ToS {
		return usage("band", "from %v s to %v s is not an ascending range of periods", b.FromS, b.ToS)
	}
	return nil
}

func parseSeconds(text string) (float64, error) {
	if x, rest, err := splitNumber("periods", text); err == nil && strings.TrimSpace(rest) == "" {
		s, _ := x.Float64()
		return s, checkPositive("periods", text, s)
	}
	return parsePositive("periods", text, timeUnits)
}

// parseRatio reads "5%" or "0.05", rounded once.
func parseRatio(what, text string) (float64, error) {
	x, rest, err := splitNumber(what, text)
	if err != nil {
		return 0, err
	}
	switch strings.TrimSpace(rest) {
	case "":
	case "%":
		x = new(big.Rat).Quo(x, big.NewRat(100, 1))
	default:
		return 0, usage(what, "unknown unit %q in %q; write a percentage such as 5%% or a ratio such as 0.05", strings.TrimSpace(rest), text)
	}
	ratio, _ := x.Float64()
	return ratio, nil
}

// parseList splits at commas. The empty text gives nil.
func parseList(text string, item func(string) (float64, error)) ([]float64, error) {
	if strings.TrimSpace(text) == "" {
		return nil, nil
	}
	var out []float64
	for part := range strings.SplitSeq(text, ",") {
		x, err := item(part)
		if err != nil {
			return nil, err
		}
		out = append(out, x)
	}
	return out, nil
}

func uniqueInOrder(xs []float64) []float64 {
	var out []float64
	for _, x := range xs {
		if !slices.Contains(out, x) {
			out = append(out, x)
		}
	}
	return out
}

// ascending returns the values sorted, each once.
func ascending(xs []float64) []float64 {
	return slices.Compact(slices.Sorted(slices.Values(xs)))
}

// percentText writes a ratio as a percentage in at most six digits.
func percentText(ratio float64) string {
	return strconv.FormatFloat(100*ratio, 'g', 6, 64) + "%"
}
