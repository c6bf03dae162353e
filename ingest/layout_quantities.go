package ingest

import (
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"
)

// quantityKey is a quantity, of one column or, with column 0, of all.
type quantityKey struct {
	name   string
	column int
}

// ownQuantities are what a layout can find beside what a catalogue can say. They
// decide what the numbers mean or where they end, and are checked one by one.
var ownQuantities = []string{
	"rate_hz", "count", "channels", "scale", "scale_divisor", "peak", "start_time", "direction", "channel", "processing",
}

// needed are the quantities without which numbers would be read wrongly: a
// pattern that promises one must find it.
var needed = []string{"unit", "dt_s", "rate_hz", "count", "channels", "scale", "scale_divisor", "peak"}

// quantityNames returns the quantities that a layout can speak of.
func quantityNames() []string {
	names := slices.Clone(ownQuantities)
	for name := range maps.Keys(catalogueColumns) {
		if name != "file" && name != "component" {
			names = append(names, name)
		}
	}
	slices.Sort(names)
	return names
}

func isQuantity(name string) bool { return slices.Contains(quantityNames(), name) }

func isTimeQuantity(name string) bool { return name == "start_time" || name == "origin_time" }

// ofColumns reports whether a quantity may differ from column to column.
func ofColumns(name string) bool {
	return slices.Contains([]string{"unit", "scale", "scale_divisor", "peak", "direction", "azimuth_deg", "channel", "instrument"}, name)
}

// checkQuantity says what is wrong with a quantity that a description fixes.
func checkQuantity(name, text string) error {
	var row catalogueRow
	var err error
	ok := true
	switch name {
	case "rate_hz":
		_, err = numberWithin(text, limits{1 / MaxStepS, 1 / MinStepS})
	case "count", "channels":
		_, err = wholeNumber(text)
	case "scale", "scale_divisor":
		_, err = positiveNumber(text)
	case "peak":
		_, err = numberWithin(text, limits{-maxPlain, maxPlain})
	case "start_time":
		at, _, known := parseInstant(text)
		if !known || at.IsZero() {
			err = fmt.Errorf("expected a time as 2006-01-02T15:04:05Z, found %s", found(text))
		}
	case "direction":
		if _, ok = layoutDirection(text); !ok {
			err = fmt.Errorf("unknown direction %s", found(text))
		}
	case "processing":
		_, err = parseProcessing(text)
	case "channel":
	default:
		err = catalogueColumns[name].set(&row, text)
	}
	return err
}

func parseProcessing(text string) (Processing, error) {
	for _, p := range []Processing{ProcessingUnknown, ProcessingRaw, ProcessingCorrected, ProcessingMeanRemoved} {
		if strings.EqualFold(text, string(p)) {
			return p, nil
		}
	}
	return ProcessingUnknown, fmt.Errorf("expected raw, corrected, mean-removed or unknown, found %s", found(text))
}

// wholeNumber reads a count.
func wholeNumber(text string) (int, error) {
	v, ok := parseNumber([]byte(text))
	if !ok || v != math.Trunc(v) || v < 1 || v > math.MaxInt32 {
		return 0, fmt.Errorf("expected a whole number over zero, found %s", found(text))
	}
	return int(v), nil
}

// positiveNumber reads a factor.
func positiveNumber(text string) (float64, error) {
	v, ok := parseNumber([]byte(text))
	if !ok || !(v > 0) || v >= maxPlain {
		return 0, fmt.Errorf("expected a number over zero, found %s", found(text))
	}
	return v, nil
}

// layoutValues are what the lines before the numbers say.
type layoutValues struct {
	text   map[quantityKey]statement
	times  map[string]*timeParts
	doubts []string // what was not understood, for the channels' warnings
}

// over returns v and what below says beside it.
func (v layoutValues) over(below layoutValues) layoutValues {
	out := layoutValues{maps.Clone(below.text), maps.Clone(below.times), slices.Concat(below.doubts, v.doubts)}
	if out.text == nil {
		return v
	}
	maps.Copy(out.text, v.text)
	maps.Copy(out.times, v.times)
	return out
}

// stated returns what is said of a quantity: of the column before of all, by the
// file before by the description.
func (l *Layout) stated(v layoutValues, name string, column int) (statement, bool) {
	keys := []quantityKey{{name, column}, {name, 0}}
	for _, k := range keys {
		if s, ok := v.text[k]; ok {
			return s, true
		}
		if s, ok := l.fixed[k]; ok {
			return statement{s, 0}, true
		}
	}
	return statement{}, false
}

// find looks for what the layout finds on the lines before the numbers. Two
// lines that differ in a quantity are an error, as is a promised one that
// decides what the numbers mean and is not there.
func (l *Layout) find(t *Text, s span, inFile bool) (layoutValues, error) {
	type missing struct {
		key     quantityKey
		pattern string
	}
	var missed []missing
	v := layoutValues{text: map[quantityKey]statement{}, times: map[string]*timeParts{}}
	for i := range l.finds {
		f := &l.finds[i]
		if f.inFile != inFile {
			continue
		}
		first, last := s.first, s.last
		if f.line > 0 {
			first = s.first + f.line - 1
			last = min(last, first)
		}
		seen := map[string]bool{}
		for n := first; n <= last; n++ {
			line := t.Bytes(n)
			if !f.pattern.matches(line) {
				continue
			}
			if err := l.take(&v, f, line[:min(len(line), maxHeading)], n, seen); err != nil {
				return v, err
			}
		}
		for _, name := range f.gives {
			if name == "" || seen[name] || f.optional {
				continue
			}
			if slices.Contains(needed, name) {
				return v, refuse(max(s.last, 1), name, "not found: no line from %d to %d gives it by the pattern %s", first, max(first, last), f.pattern)
			}
			missed = append(missed, missing{quantityKey{name, f.column}, f.pattern.String()})
		}
	}
	for _, m := range missed {
		if _, ok := v.text[m.key]; !ok && v.times[m.key.name] == nil {
			v.doubts = append(v.doubts, fmt.Sprintf("%s not found by the pattern %s", m.key.name, m.pattern))
		}
	}
	return v, nil
}

// take keeps what the groups of a pattern match in a line.
func (l *Layout) take(v *layoutValues, f *layoutFind, line []byte, n int, seen map[string]bool) error {
	m := f.pattern.FindSubmatch(line)
	for i, name := range f.gives {
		text := strings.TrimSpace(latin(m[i]))
		if name == "" || text == "" {
			continue
		}
		seen[name] = true
		if isTimeQuantity(name) {
			v.takeTime(f, name, text, n)
			continue
		}
		if l.numbers.form.comma {
			text = withPoint(name, text)
		}
		key := quantityKey{name, f.column}
		if before, ok := v.text[key]; ok && before.text != text {
			return refuse(n, name, "%s here, %s in line %d: the layout must say which line counts", found(text), found(before.text), before.line)
		} else if !ok {
			v.text[key] = statement{text, n}
		}
	}
	return nil
}

// takeTime keeps a time or a part of one. What is not written as the layout says,
// or contradicts an earlier line, is a doubt, and a time in doubt is unknown.
func (v *layoutValues) takeTime(f *layoutFind, name, text string, line int) {
	parts, seen := v.times[name]
	if parts == nil && seen {
		return
	}
	if !seen {
		parts = &timeParts{}
		v.times[name] = parts
	}
	if !parts.add(f.time, text, line) {
		v.times[name] = nil
		v.doubts = append(v.doubts, fmt.Sprintf("line %d: %s %s not understood", line, name, found(text)))
	}
}

// withPoint returns a number or position that is written with a decimal comma
// with a point, and any other text as it is.
func withPoint(name, text string) string {
	pointed := strings.Replace(text, ",", ".", 1)
	if _, ok := parseNumber([]byte(pointed)); ok || strings.HasSuffix(name, "itude") {
		return pointed
	}
	return text
}

// errNoDegrees is the cause where a position is no angle.
var errNoDegrees = errors.New("expected degrees, perhaps with minutes, seconds and N, S, E or W")

// degrees reads an angle: "-35.67", "35.67S", "S 35 40 12", "35°40.2'S".
func degrees(text string) (float64, error) {
	letters := strings.Trim(strings.ToUpper(text), "0123456789.+-°º'\"′″ :")
	if len(letters) > 1 || !strings.Contains("NSEW", letters) {
		return 0, errNoDegrees
	}
	rest := strings.TrimSpace(strings.Replace(strings.ToUpper(text), letters, "", 1))
	parts := strings.FieldsFunc(rest, func(r rune) bool { return strings.ContainsRune("°º'\"′″ :", r) })
	if len(parts) == 0 || len(parts) > 3 {
		return 0, errNoDegrees
	}
	negative := strings.HasPrefix(parts[0], "-")
	if negative && letters != "" {
		return 0, errNoDegrees
	}
	sum, unit := 0.0, 1.0
	for i, p := range parts {
		v, ok := parseNumber([]byte(strings.TrimLeft(p, "+-")))
		if !ok || i > 0 && (v >= 60 || strings.ContainsAny(p, "+-")) {
			return 0, errNoDegrees
		}
		sum += float64(v / unit)
		unit *= 60
	}
	if negative || letters == "S" || letters == "W" {
		sum = -sum
	}
	return sum, nil
}
