package ingest

import (
	"slices"
	"strings"
)

// columnKind is what a column holds.
type columnKind int

const (
	columnUnknown columnKind = iota
	columnTime
	columnValue    // acceleration
	columnIgnored  // velocity, displacement, ordinates of spectra, sample number
	columnSpectral // periods or frequencies of spectra
)

// plainColumn is the meaning of one column.
type plainColumn struct {
	kind        columnKind
	name        string
	line        int // of the name
	orientation Orientation
	unit        statement // of a value column
	scale       float64   // s per unit of a time column whose name states it, else 0
	channel     codedChannel
	byComment   bool // named by a comment, perhaps by chance
}

// columns gives the columns their meaning by the names over them. Unnamed, one
// column is the values, and two wait for settleColumns; three and more are refused.
func (h *plainHead) columns(form numberForm) ([]plainColumn, error) {
	columns, err := h.named(form)
	switch {
	case err != nil:
		return nil, err
	case columns == nil && form.fields > 2:
		return nil, refuse(h.first, "samples", "%d values a line and no names over them: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names", form.fields)
	case columns == nil:
		columns = make([]plainColumn, form.fields)
	}
	if form.fields == 1 && columns[0].kind == columnUnknown {
		columns[0].kind = columnValue
	}
	return columns, nil
}

// settleColumns decides by the numbers what names leave open, and checks that
// what is left can be read.
func settleColumns(columns []plainColumn, rows *plainRows) ([]plainColumn, error) {
	if len(columns) == 2 {
		if err := settlePair(columns, rows); err != nil {
			return nil, err
		}
	}
	times, values := 0, 0
	for i := range columns {
		switch columns[i].kind {
		case columnTime:
			if times++; times > 1 {
				return nil, refuse(rows.line[0], "columns", "more than one time column")
			}
			if columns[i].scale == 0 && countsSamples(rows.values[i]) {
				columns[i].kind = columnIgnored
			}
		case columnValue:
			if values++; strings.EqualFold(columns[i].orientation.Label, "T") && isRising(rows.values[i]) {
				return nil, refuse(columns[i].line, "columns", "column T rises like a time: write time or transverse")
			}
		}
	}
	if values == 0 {
		for _, c := range columns {
			if reason := otherQuantity(commentKey(c.name)); reason != "" {
				return nil, &NotMotionError{reason}
			}
		}
		return nil, refuse(rows.line[0], "columns", "no column of accelerations")
	}
	if err := checkDirections(columns, rows.line[0]); err != nil {
		return nil, err
	}
	if err := checkCodes(columns); err != nil {
		return nil, err
	}
	return columns, checkAxes(columns)
}

// checkDirections refuses value columns that cannot be told apart.
func checkDirections(columns []plainColumn, line int) error {
	var labels []string
	unlabelled := 0
	for _, c := range columns {
		if c.kind != columnValue {
			continue
		}
		label := strings.ToUpper(c.orientation.Label)
		if label == "" {
			unlabelled++
		}
		if slices.Contains(labels, label) || unlabelled > 0 && len(labels) > 0 {
			return refuse(line, "columns", "column %s: several columns of accelerations need different directions as names", found(c.name))
		}
		labels = append(labels, label)
	}
	if len(labels) > 3 {
		return refuse(line, "columns", "%d columns of accelerations; a record has three at most", len(labels))
	}
	return nil
}

// settlePair decides which of two columns is the time. Names settle it; where one
// of them says nothing, the first is the time if it rises evenly and the second
// does not rise throughout.
func settlePair(columns []plainColumn, rows *plainRows) error {
	a, b := &columns[0], &columns[1]
	if isChance(*a) && isChance(*b) && isMostlyEven(rows.values[0]) && !isRising(rows.values[1]) {
		*a, *b = plainColumn{kind: columnTime}, plainColumn{kind: columnValue}
	}
	switch {
	case a.kind != columnUnknown && b.kind != columnUnknown:
		return nil
	case a.kind == columnTime:
		b.kind = columnValue
		return nil
	case b.kind == columnTime:
		a.kind = columnValue
		return nil
	}
	first, second := rows.values[0], rows.values[1]
	switch rising := isRising(second); {
	case (isRising(first) || isMostlyEven(first)) && !rising:
		*a = plainColumn{kind: columnTime}
		b.kind = columnValue
		return nil
	case thousands.MatchString(rows.head) || spaced.MatchString(rows.head):
		return refuse(rows.line[0], "samples", "%s", badLine([]byte(rows.head)))
	case rising:
		return refuse(rows.line[0], "columns", "both columns rise throughout, either may be the time; name the columns")
	}
	return refuse(rows.line[0], "columns", "two columns, and the first does not rise like a time: a wrapped series needs a count (# npts = N) or a layout, with --layout; columns need names")
}

// isChance reports whether a comment has a word in it that could name a direction.
func isChance(c plainColumn) bool {
	return c.byComment && c.kind == columnValue && c.unit.text == ""
}

func isRising(xs []float64) bool {
	for i := 1; i < len(xs); i++ {
		if !(xs[i] > xs[i-1]) {
			return false
		}
	}
	return len(xs) > 1
}

// isMostlyEven reports whether nine in ten steps are the median step within a
// tenth of it, and that one is over zero.
func isMostlyEven(xs []float64) bool {
	steps := stepsOf(xs)
	if len(steps) == 0 {
		return false
	}
	m, even := median(steps), 0
	for _, s := range steps {
		if s >= 0.9*m && s <= 1.1*m {
			even++
		}
	}
	return m > 0 && even*10 >= len(steps)*9
}

// countsSamples reports whether xs is a column of sample numbers: whole, each
// one more than the last.
func countsSamples(xs []float64) bool {
	for i := range xs {
		if i > 0 && xs[i]-xs[i-1] != 1 {
			return false
		}
	}
	return len(xs) > 1
}
