package ingest

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
)

// statements returns the keys and values of a line, and what it says of the numbers
// in words alone: "acceleration in gal", "200 samples per second".
func (l heading) statements() []comment {
	out := splitComment(l.text, l.line)
	for i, c := range out {
		if slices.Contains(unitKeys, c.key) {
			out[i].value = oneUnit(c.value)
		}
	}
	base, unit := splitUnit(l.text)
	if name, after, ok := strings.Cut(l.text, ","); ok && unit == "" {
		base, unit = name, strings.TrimSpace(after) // ACCELERATION, G
		if before, _, more := strings.Cut(after, ","); more {
			unit = strings.TrimSpace(before)
		}
	}
	if slices.Contains(accelerationNames, commentKey(base)) {
		if _, err := ParseUnit(unit); err == nil {
			out = append(out, comment{key: "unit", value: unit, line: l.line})
		}
	}
	if m := rateInWords.FindStringSubmatch(l.text); m != nil {
		out = append(out, comment{key: "rate", value: m[1], line: l.line})
	}
	return out
}

// oneUnit returns the first of a unit and its other name in brackets, gal(cm/s/s),
// where they mean the same.
func oneUnit(text string) string {
	name, other, two := strings.Cut(strings.TrimSuffix(text, ")"), "(")
	if two && sameStatement(name, other) {
		return strings.TrimSpace(name)
	}
	return text
}

// How lines speak of units, rates and steps. Of the letter g alone the small one is
// meant, or any in brackets.
var (
	rateInWords = regexp.MustCompile(`(?i)^([\d.]+) *(?:samples|points|readings) *(?:per|/) *s(?:ec(?:onds?)?)?\.?$`)

	unitMentions = []*regexp.Regexp{
		regexp.MustCompile(`(?i)(?:^|[^\pL\d])((?:cm|mm|m|in|ft) *(?:/ *s(?:ec)? *(?:(?:\^|\*\*)? *2|²|/ *s(?:ec)?)|s?[ ·]*s\^?[-−⁻][2²]|ps2|s2)|gals?|mg|milli-?g)(?:$|[^\pL\d])`),
		regexp.MustCompile(`(?i)(?:^|[^\pL\d])((?:(?:centi|milli)?met(?:er|re)s?|inch(?:es)?|feet|foot|cm|mm|m|in|ft) *(?:/|\bper\b) *s(?:ec(?:ond)?)?\.? *(?:squared|(?:/|\bper\b) *s(?:ec(?:ond)?)?|(?:\^|\*\*)? *2|²))(?:$|[^\pL\d])`),
		regexp.MustCompile(`(?:^|[\s=/,:;])(g)(?:$|[\s),;.\]])`),
		regexp.MustCompile(`[(\[] *([gG]) *[)\]]`),
		regexp.MustCompile(`(?i)(?:\bin|\bof|\bunits?:?) +(g'?s?)(?:$|[\s),;.\]])`),
	}
	rateMentions = []*regexp.Regexp{
		regexp.MustCompile(`(?i)([\d.]+) *(?:sps\b|(?:samples|points|readings) *(?:per|/) *s)`),
		regexp.MustCompile(`(?i)(?:\bsampl|\brate\b|\bdigiti|\bfs\b)[^\d.]*([\d.]+) *hz`),
		regexp.MustCompile(`(?i)(?:sampling|sample) *(?:rate|frequency)[^\d.]{0,20}([\d.]+)`),
		regexp.MustCompile(`(?i)\bfs\b[^\d.]{0,5}([\d.]+)`),
		regexp.MustCompile(`(?i)^([\d.]+) *hz$`),
		regexp.MustCompile(`(?i)^sps\W+([\d.]+)$`),
		regexp.MustCompile(`(?i)^freq(?:uency)?\W+((?:[5-9]\d|[1-9]\d\d)(?:\.\d*)?) *(?:hz)?$`), // lower ones are corners
	}
	stepMentions = []*regexp.Regexp{
		regexp.MustCompile(`(?i)(?:\bdt\b|\bdelta[ _]?t\b|Δt|\btime[ _-]?step|\bstep\b|\bequal(?:ly)? +spac(?:ed|ing)|\b(?:time|sampl\w+|data) *spacing|\b(?:time|sampl\w+) *increment|intervals?\b|sampling[ _-]?period|\bevery\b)[^\d.]{0,20}(\d*\.?\d+(?:e[-+]?\d+)?)( *ms| *msec| *milli)?`),
		regexp.MustCompile(`(?i)(\d*\.?\d+)( *ms| *msec| *milli)?[a-z ]{0,8} (?:intervals?|steps?|apart)\b`),
		// Alone on a line; degrees are those of an epicentre.
		regexp.MustCompile(`(?i)\bdelta(?: ?x)?\b[^\d.]{0,20}(\d*\.?\d+(?:e[-+]?\d+)?)( *ms| *msec| *milli)?(?: *s(?:ec(?:onds?)?)?\.?)?(?:$|[,;)])`),
		regexp.MustCompile(`(?i)^\d+[\s,]+(\d*\.\d+)()[\s,]+npts[\s,]+dt\b`),
	}
)

// otherUnits are the words of lines that speak of a unit and not of the numbers:
// what the instrument does, peaks, and gravity itself. unitStated are those of lines
// that plainly speak of the numbers.
var (
	otherUnits  = regexp.MustCompile(`(?i)full.?scale|\brange\b|trigger|threshold|sensitivity|\bpeak\b|\bpga\b|\bmax(?:imum)?\b|\bg *= *\d|\b1 *g *=`)
	unitStated  = regexp.MustCompile(`(?i)\bunits?\b|\bacc(?:el(?:eration)?s?)?\b|accelerogram|amplitude|\bvalues?\b|\bdata\b|\bsamples\b|\bpoints\b|\breadings\b|ground motion|scaled`)
	afterNumber = regexp.MustCompile(`(?i)(?:[\d.] *|V */ *)$`)
)

// Lines that say that the numbers are counts, or by what to multiply them, those that speak
// of counts which are no more, and those of units that are not known, or multiples of one.
var (
	counted = regexp.MustCompile(`(?i)^(?:counts?|cts)$|\b(?:in|as|are|raw|digital|digiti[sz]er|adc|a/d|bit|integer|units?:?) +(?:counts?|cts)\b|[(\[] *(?:counts?|cts) *[)\]]|(?:/|\bper\b) *counts?\b|\bcounts? *(?:/|\bper\b)|\b1 *counts? *=`)
	// voltCounts are what a digitiser makes of its input, whatever the numbers are.
	voltCounts = regexp.MustCompile(`(?i)\bcounts? *(?:/|per\b) *(?:[µμum]|micro|milli)?v(?:olts?)?\b|(?:[µμum]|micro|milli)?v(?:olts?)? *(?:/|per\b) *counts?\b`)
	recounted  = regexp.MustCompile(`(?i)\bfrom +(?:\w+ +)?counts?\b|\bcounts?\b[^.]*\b(?:converted|divided)\b|\bmultiplied\b`)
	otherScale = regexp.MustCompile(`(?i)\bm(?:illi)?gals?\b|(?:%|\bpercent(?: +of)?) *g(?:$|[^\pL\d])` +
		`|\bin +(?:\d*\.?\d+|10 *\^ *-?\d+) *(?:gals?|m?g|(?:cm|mm|m)/s\S*)(?:$|[\s),;])` +
		`|(?:\b(?:values?|data|samples|numbers|accelerations?)\b[^\d]*|(?:s2|s\^2|s/s|\bgals?|\bg) *)[x×*] *10(?:0*|\^ *-?\d+|\*\* *-?\d+)(?:$|[\s),;])` +
		`|(?:\bin|\bunits?:?) +(?:m|milli|µ|micro)?v(?:olts?)?(?:$|[\s),;])|^(?:m|milli|micro)?volts?$|\b(?:digiti[sz]er|machine|recorder) +units\b`)
	unchanged  = regexp.MustCompile(`(?i)\bnot\b|\bto be\b`)
	multiplied = regexp.MustCompile(`(?i)\bmultiply\b.*\d|^multiplier\W*[\d.]|^scale factor\W*[\d.]+ *\(.*/`)
	factor     = regexp.MustCompile(`(?i)^(?:(?:data|value|unit|amplitude) +)?(?:(?:scale|scaling|conversion|multiplication)(?: +(?:factor|constant))?|calibration +(?:factor|constant))[\s:=]+([-+]?[\d.]+(?:e[-+]?\d+)?)\W*$`)
)

// isScaled reports whether a line says that the numbers are counts, or are to be
// multiplied by another number than one.
func isScaled(text string) bool {
	if m := factor.FindStringSubmatch(text); m != nil {
		v, ok := parseNumber([]byte(m[1]))
		return ok && v != 1
	}
	text = voltCounts.ReplaceAllString(text, "")
	return multiplied.MatchString(text) || otherScale.MatchString(text) && !otherUnits.MatchString(text) || counted.MatchString(text) && (!recounted.MatchString(text) || unchanged.MatchString(text)) && !otherUnits.MatchString(text)
}

// checkUnit refuses a unit that was stated for all files where a line that is not
// understood seems to state another for the numbers; beside one that was stated for
// this file it is a warning.
func (h *plainHead) checkUnit(hints Hints) (warning string, err error) {
	hint, err := ParseUnit(hints.Unit)
	if err != nil {
		return "", nil // chooseUnit says so
	}
	for _, l := range h.lines {
		other := l.otherThan(hint)
		if other != "" && hints.UnitForAll {
			return "", refuse(l.line, "unit", "%s speaks of %s, %s says %s: state the unit as # unit: …", found(l.text), other, orElse(hints.UnitFrom, "the hint"), hint.Name)
		}
		if other != "" {
			warning = fmt.Sprintf("line %d speaks of %s: %s from %s taken", l.line, other, hint.Name, orElse(hints.UnitFrom, "hint"))
		}
	}
	return warning, nil
}

// otherThan says what else than the hint's unit the line seems to say of the numbers,
// "" for nothing.
func (l heading) otherThan(hint Unit) string {
	if isScaled(l.words()) {
		return "counts or a scale"
	}
	if l.states(peakKeys) || otherUnits.MatchString(l.words()) {
		return ""
	}
	if unit, ok := l.otherUnit(hint); ok {
		return unit.Name
	}
	if unit := l.otherMotion(); unit != "" {
		return unit + ", which is no acceleration"
	}
	return ""
}

// motionUnits are those of velocity and displacement, as what a line says or where it
// speaks of the numbers, and besideMotion are words of lines that have a unit of
// acceleration too, or speak of another motion beside the numbers.
var (
	motionUnits = []*regexp.Regexp{
		regexp.MustCompile(`(?i)^[(\[]? *((?:cm|mm|m|in|ft) *(?:/ *s(?:ec)?|per *sec(?:ond)?))\.? *[)\]]?$`),
		regexp.MustCompile(`(?i)(?:\bunits?\b|\bvalues?\b|\bdata\b|\bamplitudes?\b|\bpoints\b|\breadings\b).*?(?:^|[^\pL\d.] *)((?:cm|mm|m|in|ft) *(?:/ *s(?:ec)?|per *sec(?:ond)?))\.?(?:[\s),;\]]|$)`),
		regexp.MustCompile(`(?i)(?:\bunits?|\bvalues?|\bdata|\bamplitudes?)(?: +are)?:? +(?:in|of) +(cm|mm|m|inch(?:es)?|ft|feet)\W*$`),
	}
	besideMotion = regexp.MustCompile(`(?i)\bvel|\bdisp|\bpg[vd]\b|\bvs\d*\b|\bwave`)
)

// otherMotion returns the unit of velocity or displacement that the line seems to state
// of the numbers, "" for none.
func (l heading) otherMotion() string {
	line := l.words()
	if besideMotion.MatchString(line) || len(mentions(unitMentions, line)) > 0 {
		return ""
	}
	if m := mentions(motionUnits, line); len(m) > 0 {
		return m[0][1]
	}
	return ""
}

// doubtScales warns of lines that speak of counts or a scale beside a unit that the file
// states, which may be that of the numbers or of what becomes of them.
func (h *plainHead) doubtScales(unit Unit, warning string, err error) (Unit, string, error) {
	for _, l := range h.lines {
		if err == nil && isScaled(l.words()) {
			h.doubt("line %d: %s speaks of counts or a scale: the numbers taken as %s", l.line, found(l.text), unit.Name)
		}
	}
	return unit, warning, err
}

// otherUnit returns another unit than the hint's that the line seems to state: with
// a word for the numbers, as all that it says, or as all that follows a key. A number
// before it makes it a quantity, unless the line says unit.
func (l heading) otherUnit(hint Unit) (Unit, bool) {
	line := l.words()
	value := line[strings.LastIndexAny(line, ":=")+1:]
	_, err := ParseUnit(value)
	if err != nil && !unitStated.MatchString(line) {
		return Unit{}, false
	}
	isUnit := strings.Contains(strings.ToLower(line), "unit")
	for _, pattern := range unitMentions {
		for _, m := range pattern.FindAllStringSubmatchIndex(line, -1) {
			text := strings.ReplaceAll(line[m[2]:m[3]], " s2", "s2")
			unit, err := ParseUnit(strings.ReplaceAll(text, "ms2", "m/s2"))
			if err == nil && unit.MPS2 != hint.MPS2 && (isUnit || !afterNumber.MatchString(line[:m[2]])) {
				return unit, true
			}
		}
	}
	return Unit{}, false
}

// maxWords is how many bytes of a line are looked through for what it says in words.
const maxWords = 250

// words is the line with blanks for underscores, which are no ends of words.
func (l heading) words() string {
	return strings.ReplaceAll(l.text[:min(len(l.text), maxWords)], "_", " ")
}

// states reports whether the line has one of the keys.
func (l heading) states(keys []string) bool {
	return slices.ContainsFunc(l.statements(), func(c comment) bool { return slices.Contains(keys, c.key) })
}

// otherSteps are the words of lines that speak of other intervals than that of the
// numbers, or of what it was before.
var otherSteps = regexp.MustCompile(`(?i)decimated|resampled|pre-?(?:event|trigger)|\btaper|baseline`)

// checkStep refuses a step that only hints state where a line that is not understood
// speaks of another. What is no step of a record counts something else.
func (h *plainHead) checkStep(hints Hints) error {
	for _, l := range h.lines {
		line := l.words()
		if otherSteps.MatchString(line) {
			continue
		}
		for _, m := range mentions(rateMentions, line) {
			rate, ok := parseNumber([]byte(m[1]))
			if ok && isOtherStep(1/rate, hints.StepS) {
				return refuse(l.line, "dt", "%s speaks of %g samples a second, %s says a step of %.6g s: state it as # rate = …", found(l.text), rate, orElse(hints.StepFrom, "the hint"), hints.StepS)
			}
		}
		for _, m := range mentions(stepMentions, line) {
			step, ok := parseNumber([]byte(m[1]))
			if m[2] != "" {
				step /= 1000
			}
			if ok && isOtherStep(step, hints.StepS) {
				return refuse(l.line, "dt", "%s speaks of a step of %.6g s, %s says %.6g s: state it as # dt = …", found(l.text), step, orElse(hints.StepFrom, "the hint"), hints.StepS)
			}
		}
	}
	return nil
}

// isOtherStep reports whether v in s can be a step of a record, and is not this one.
func isOtherStep(v, step float64) bool {
	return v >= MinStepS && v <= MaxStepS && math.Abs(v-step) > stepAgreement*v
}

// mentions returns what the patterns find in the text.
func mentions(patterns []*regexp.Regexp, text string) (all [][]string) {
	for _, pattern := range patterns {
		all = append(all, pattern.FindAllStringSubmatch(text, -1)...)
	}
	return all
}

// checkOthers refuses a file whose lines before the numbers hold the header of
// another format below some lines that are none of it.
func (h *plainHead) checkOthers(t *Text) error {
	for i, l := range h.lines {
		if i == 0 || !l.sure {
			continue
		}
		rest := &Content{Text: &Text{lines: t.lines[l.line-1:], endsLine: t.endsLine}}
		for _, f := range formats {
			if f.Sniff(rest) != "" {
				return refuse(l.line, "", "from here on a file of the format %s: remove the lines before it", f.Info().Name)
			}
		}
	}
	return nil
}
