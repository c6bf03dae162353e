package ingest

import (
	"bytes"
	"errors"
	"math"
	"strings"
)

// plain reads columns of numbers that follow no known format: one column of
// accelerations, a time and an acceleration, or columns whose names say what
// they are. It is the last resort: what the file does not say about unit and
// time step must come from hints, and what could be read in two ways is refused.
//
// The rules are common practice; there is no standard behind them.
type plain struct{}

// Info describes the format.
func (plain) Info() Info {
	return Info{
		Name: "plain", Title: "columns of numbers, by comma, semicolon, tab or blanks", Channels: "as many as are named",
		Unit: "as stated in the file, or --unit",
	}
}

const (
	// plainPreamble is how many lines may stand before the first number.
	plainPreamble = 100
	// plainHeadLines is how many lines of numbers decide delimiter and decimal mark.
	plainHeadLines = 200
	// plainSniffed is how many lines of numbers Sniff looks at.
	plainSniffed = 50
)

// Sniff looks for lines of numbers: below the preamble 95 % of the first lines,
// or all but two of them, must look like numbers.
func (plain) Sniff(c *Content) string {
	t := c.Text
	first := firstNumbers(t)
	if first == 0 {
		return ""
	}
	lines, good := 0, 0
	for n := first; n <= t.Len() && lines < plainSniffed; n++ {
		line := t.Bytes(n)
		if len(bytes.TrimSpace(line)) == 0 || isComment(line) {
			continue
		}
		lines++
		if numberLike(line) {
			good++
		}
	}
	if bad := lines - good; bad > max(2, lines/20) || good <= bad {
		return ""
	}
	return "lines of numbers"
}

// Parse reads the value columns as channels.
func (plain) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	head, err := readPlainHead(t)
	if err != nil {
		return nil, err
	}
	if err := head.checkOthers(t); err != nil {
		return nil, err
	}
	if err := head.otherSeries(); err != nil {
		return nil, err
	}
	if err := head.checkRepeats(); err != nil {
		return nil, err
	}
	form, err := detectForm(t, head.first)
	if err != nil {
		return nil, err
	}
	columns, rows, err := head.read(t, form)
	if err != nil {
		return nil, err
	}
	if err := head.otherInWords(columns, hints); err != nil {
		return nil, err
	}
	if err := head.checkCount(len(rows.line)); err != nil {
		return nil, err
	}
	step, err := head.step(columns, rows, hints)
	if err != nil {
		return nil, err
	}
	return head.channels(columns, rows, step, hints)
}

// read reads the numbers and settles what the columns hold.
func (h *plainHead) read(t *Text, form numberForm) ([]plainColumn, *plainRows, error) {
	rows, err := h.wrapped(t, form)
	if err != nil {
		return nil, nil, err
	}
	if rows != nil {
		columns := []plainColumn{{kind: columnValue}}
		return columns, rows, h.readRemarks(t, columns, rows)
	}
	columns, err := h.columns(form)
	if err != nil {
		return nil, nil, err
	}
	if rows, err = readRows(t, h.first, form); err != nil {
		return nil, nil, err
	}
	if columns, err = settleColumns(columns, rows); err == nil {
		err = h.readRemarks(t, columns, rows)
	}
	return columns, rows, err
}

// channels makes a channel of each value column.
func (h *plainHead) channels(columns []plainColumn, rows *plainRows, step float64, hints Hints) ([]Channel, error) {
	var out []Channel
	for i, col := range columns {
		if col.kind != columnValue {
			continue
		}
		unit, warning, err := h.unit(col, hints)
		if err != nil {
			return nil, err
		}
		c := Channel{
			Orientation: col.orientation, StepS: step, Line: rows.line[0],
			Acceleration: rows.values[i], Unit: unit.Name, UnitMPS2: unit.MPS2,
			Siting: SitingUnknown, Processing: ProcessingUnknown,
		}
		if warning != "" {
			c.warn("%s", warning)
		}
		if why := col.channel.whyNone(); why != "" {
			c.warn("column %s%s", found(col.name), why)
		}
		c.Warnings = append(c.Warnings, h.doubts...)
		warnUnused(&c, hints)
		if rows.minus > 0 {
			c.warn("line %d: U+2212 read as a minus sign", rows.minus)
		}
		if err := h.describe(&c); err != nil {
			return nil, err
		}
		warnOffset(&c)
		warnLength(&c)
		scale(c.Acceleration, unit.MPS2)
		out = append(out, c)
	}
	if len(out) == 1 {
		h.setPeak(&out[0])
		if err := h.direct(&out[0]); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// warnUnused warns that the file's own unit or step was taken, and not the one
// stated for all files.
func warnUnused(c *Channel, hints Hints) {
	if unit, err := ParseUnit(hints.Unit); err == nil && hints.UnitForAll && unit.MPS2 != c.UnitMPS2 {
		c.warn("the file says %s: %s from %s not used", c.Unit, unit.Name, hints.UnitFrom)
	}
	if hints.StepForAll && hints.StepS != 0 && math.Abs(hints.StepS-c.StepS) > stepAgreement*c.StepS {
		c.warn("the file says a step of %.6g s: %.6g s from %s not used", c.StepS, hints.StepS, hints.StepFrom)
	}
}

// warnOffset warns of a mean over a tenth of the peak, which stays in the
// samples.
func warnOffset(c *Channel) {
	sum, peak := 0.0, 0.0
	for _, v := range c.Acceleration {
		sum += v
		if a := math.Abs(v); a > peak {
			peak = a
		}
	}
	if mean := sum / float64(len(c.Acceleration)); math.Abs(mean) > 0.1*peak {
		c.warn("mean of %.3g %s is over a tenth of the peak: an offset?", mean, c.Unit)
	}
}

// unit joins what the column's name and the comments say with the hints.
func (h *plainHead) unit(col plainColumn, hints Hints) (Unit, string, error) {
	comment := h.stated(unitKeys...)
	if h.isSure(comment.line) && hints.Unit != "" && !isUnitWord(comment.text) && len(mentions(unitMentions, comment.text)) == 0 {
		h.doubt("line %d: unit %s not understood", comment.line, found(comment.text))
		comment = statement{}
	}
	switch {
	case col.unit.text != "":
	case comment.text != "":
		return h.doubtScales(chooseUnit(comment, hints))
	default:
		if err := h.checkSensor(col, hints); err != nil {
			return Unit{}, "", err
		}
		warning, err := h.checkUnit(hints)
		if err != nil {
			return Unit{}, "", err
		}
		unit, _, err := chooseUnit(comment, hints)
		return unit, warning, err
	}
	if comment.text != "" {
		a, errA := ParseUnit(col.unit.text)
		b, errB := ParseUnit(comment.text)
		if errA == nil && errB == nil && a.MPS2 != b.MPS2 {
			return Unit{}, "", refuse(col.unit.line, "unit", "the column says %s, the comment on line %d says %s", a.Name, comment.line, b.Name)
		}
	}
	return h.doubtScales(chooseUnit(col.unit, hints))
}

// step joins what the time column, the comments and the hints say.
func (h *plainHead) step(columns []plainColumn, rows *plainRows, hints Hints) (float64, error) {
	stated, line, err := h.statedStep()
	if err != nil && stated == 0 && h.isSure(line) && hints.StepS != 0 {
		h.doubt("line %d: time step or rate not understood", line)
		line = 0
	} else if err != nil {
		return 0, err
	}
	for i, col := range columns {
		if col.kind != columnTime {
			continue
		}
		timed, err := timeStep(rows.values[i], rows.resolution[i], rows.line)
		switch {
		case err != nil && rows.values[i][0] == float64(len(rows.line)-1):
			return 0, refuse(rows.line[0], "samples", "%s: a count and a time step before the values? remove the line and give the step with --dt", found(rows.head))
		case err != nil:
			return 0, err
		case col.scale != 0:
			timed = nearlyNice(timed * col.scale)
		default:
			if err := timeUnit(timed, rows.line[0]); err != nil {
				return 0, err
			}
			timed = nearlyNice(timed)
		}
		if stated == 0 {
			stated, line = timed, rows.line[0]
		} else if math.Abs(timed-stated) > stepAgreement*timed {
			return 0, refuse(line, "dt", "the comment says %.6g s, the time column steps by %.6g s", stated, timed)
		}
	}
	switch {
	case stated != 0:
		return stated, checkStep(stated, line, hints)
	case hints.StepS != 0:
		err := h.checkStep(hints)
		if pe, ok := errors.AsType[*ParseError](err); ok && !hints.StepForAll {
			h.doubt("line %d: %s", pe.Line, pe.Err)
			err = nil
		}
		return hints.StepS, err
	}
	return 0, refuse(0, "dt", "the file states no time step: give it with --dt or in the catalogue's dt_s column")
}

// commentMarks begin a comment line.
var commentMarks = []string{"#", "%", "!", ";", "*", "//", "\""}

// isComment reports whether line is a comment: its first characters that are no
// blanks are a comment mark. Quoted numbers and a row of asterisks, a number
// that did not fit its field, are none.
func isComment(line []byte) bool {
	line = bytes.TrimSpace(line)
	for _, mark := range commentMarks {
		if !bytes.HasPrefix(line, []byte(mark)) {
			continue
		}
		return !(mark == "\"" && numberLike(line) || mark == "*" && len(bytes.Trim(line, "* \t")) == 0)
	}
	return false
}

// missingMarks are how tables write a value that is not there, in lower case.
var missingMarks = []string{"nan", "inf", "-inf", "+inf", "null", "n/a", "na", "none", "-", "--"}

// isMissing reports whether a field, trimmed, stands for no value.
func isMissing(field string) bool {
	lower := strings.ToLower(field)
	for _, m := range missingMarks {
		if lower == m {
			return true
		}
	}
	return field == "" || strings.Trim(field, "*") == "" || strings.Contains(field, "#IND") || strings.Contains(field, "#INF") || strings.Contains(field, "#QNAN")
}

// numberLike reports whether a line could be numbers, well formed or not: every
// field holds a digit and nothing that no number, time or separator is written
// with, or marks a missing value; one field at least is a number.
func numberLike(line []byte) bool {
	numbers, ok := likeNumbers(line)
	return ok && numbers > 0
}

// likeNumbers counts the fields that could be numbers and reports whether there
// are none but those and missing values.
func likeNumbers(line []byte) (numbers int, ok bool) {
	for field := range bytes.FieldsFuncSeq(line, isSeparator) {
		f := strings.Trim(string(field), "\"")
		switch {
		case strings.ContainsAny(f, "0123456789") && strings.Trim(f, "0123456789+-.eEdDT:Z−'") == "":
			numbers++
		case !isMissing(f):
			return 0, false
		}
	}
	return numbers, true
}

func isSeparator(r rune) bool { return r == ' ' || r == '\t' || r == ',' || r == ';' }
