package design

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// stated are the units that somebody states, nil where nobody does.
type stated struct{ period, value *unit }

// points reads the rows of a table.
type points struct {
	path  string
	units stated
	ofRow bool // a third column holds the unit of each row
	table table
}

// readPoints reads a CSV file; units are those of the TOML file.
func readPoints(path string, text []byte, units stated) (table, *FileError) {
	p := &points{path: path, units: units}
	rows := csv.NewReader(bytes.NewReader(bytes.TrimPrefix(text, []byte("\xef\xbb\xbf"))))
	rows.Comma, rows.Comment, rows.FieldsPerRecord = separator(text), '#', -1
	for first := true; ; {
		cells, err := rows.Read()
		if err == io.EOF {
			break
		}
		if err != nil {
			return table{}, p.mistakeOf(err)
		}
		line, _ := rows.FieldPos(0)
		if cells = trimmed(cells); len(cells) == 0 {
			continue
		}
		if first && !beginsNumber(cells[0]) {
			err = p.names(cells)
		} else {
			err = p.row(cells)
		}
		if err != nil {
			return table{}, &FileError{path, line, "", err}
		}
		first = false
	}
	if n := len(p.table.periods); n < 2 {
		return table{}, &FileError{path, 0, "", fmt.Errorf("%d points; two at least are needed", n)}
	}
	return p.table, nil
}

func (p *points) mistakeOf(err error) *FileError {
	if at, ok := errors.AsType[*csv.ParseError](err); ok {
		return &FileError{p.path, at.Line, "", at.Err}
	}
	return &FileError{p.path, 0, "", err}
}

// separator is the first of these that the file has outside comments.
func separator(text []byte) rune {
	for line := range bytes.Lines(text) {
		if bytes.HasPrefix(line, []byte("#")) {
			continue
		}
		for _, c := range ";\t" {
			if bytes.ContainsRune(line, c) {
				return c
			}
		}
		if bytes.Contains(line, []byte(",")) {
			return ','
		}
	}
	return ','
}

// trimmed takes blanks off the cells and empty cells off the end, which
// spreadsheets add.
func trimmed(cells []string) []string {
	for i, c := range cells {
		cells[i] = strings.TrimSpace(c)
	}
	for len(cells) > 0 && cells[len(cells)-1] == "" {
		cells = cells[:len(cells)-1]
	}
	return cells
}

// beginsNumber reports whether a cell is meant as a number, well written or not.
func beginsNumber(cell string) bool {
	return strings.ContainsAny(cell[:min(len(cell), 1)], "0123456789+-.")
}

// names reads the row over the columns.
func (p *points) names(cells []string) error {
	if p.ofRow = len(cells) == 3 && strings.EqualFold(cells[2], "unit"); len(cells) != 2 && !p.ofRow {
		return fmt.Errorf("%d columns; want a period and a value, perhaps a third column unit", len(cells))
	}
	if lower := strings.ToLower(cells[0]); strings.Contains(lower, "freq") || strings.Contains(lower, "hz") {
		return fmt.Errorf("column %s: frequencies are not read, give periods", found(cells[0]))
	}
	if err := agree(&p.units.period, cells[0], periodUnits); err != nil {
		return err
	}
	return agree(&p.units.value, cells[1], valueUnits)
}

// agree takes the unit of a column's name, which must not contradict one that
// is stated already.
func agree(u **unit, name string, known []unit) error {
	named, err := unitIn(name, known)
	if err != nil || named == nil {
		return err
	}
	if *u != nil && *u != named {
		return fmt.Errorf("column %s is in %s, but %s is stated", found(name), named.name, (*u).name)
	}
	*u = named
	return nil
}

// unitIn returns the unit that a column's name ends in, as in "psa_m_s2" and
// "PSA [m/s²]", nil where it ends in none. What stands in brackets must be one.
func unitIn(name string, known []unit) (*unit, error) {
	if at := strings.IndexAny(name, "(["); at >= 0 {
		text := name[at+1:]
		if end := strings.IndexAny(text, ")]"); end >= 0 {
			text = text[:end]
		}
		if u := lookUp(text, known); u != nil {
			return u, nil
		}
		return nil, fmt.Errorf("column %s: unknown unit; want %s", found(name), listed(names(known)))
	}
	for rest, more := name, true; more; {
		if _, rest, more = strings.Cut(rest, "_"); more {
			if u := lookUp(rest, known); u != nil {
				return u, nil
			}
		}
	}
	return nil, nil
}

var spelling = strings.NewReplacer(" ", "", "²", "2", "**", "", "^", "", "_", "/")

// lookUp returns the known unit of this name, in its usual spellings, nil for
// none.
func lookUp(text string, known []unit) *unit {
	text = spelling.Replace(strings.ToLower(strings.TrimSpace(text)))
	switch text {
	case "sec":
		text = "s"
	case "gal":
		text = "cm/s2"
	case "m/s/s", "cm/s/s":
		text = strings.TrimSuffix(text, "/s") + "2"
	}
	for i := range known {
		if known[i].name == text {
			return &known[i]
		}
	}
	return nil
}

// Ranges within which points are taken, ours: beyond them a unit is wrong.
const (
	mostPeriodS = 1000.0
	leastPSAg   = 1e-12
	mostPSAg    = 100.0
)

// row reads a point.
func (p *points) row(cells []string) error {
	if len(cells) != 2 && !(p.ofRow && len(cells) == 3) {
		return fmt.Errorf("%d columns; want a period and a value", len(cells))
	}
	if p.ofRow {
		if err := p.unitOfRow(cells); err != nil {
			return err
		}
	}
	if p.units.period == nil || p.units.value == nil {
		return errors.New("the table states no unit: name both in the first row, as period_s,psa_g, or as period_unit and value_unit in the TOML file")
	}
	period, err := number(cells[0])
	if err != nil {
		return fmt.Errorf("period: %w", err)
	}
	value, err := number(cells[1])
	if err != nil {
		return fmt.Errorf("value: %w", err)
	}
	return p.add(period/p.units.period.per, value, *p.units.value)
}

// unitOfRow takes the unit in a third cell, for this row and those that have
// none; a table has one.
func (p *points) unitOfRow(cells []string) error {
	if len(cells) < 3 {
		return errors.New("the row has no unit")
	}
	u := lookUp(cells[2], valueUnits)
	if u == nil {
		return fmt.Errorf("unknown unit %s; want %s", found(cells[2]), listed(names(valueUnits)))
	}
	if p.units.value != nil && p.units.value != u {
		return fmt.Errorf("the row is in %s, but %s is stated", u.name, p.units.value.name)
	}
	p.units.value = u
	return nil
}

func number(cell string) (float64, error) {
	x, err := strconv.ParseFloat(cell, 64)
	switch {
	case err != nil && strings.Contains(cell, ","):
		return 0, fmt.Errorf("%s is no number with a decimal point", found(cell))
	case err != nil || math.IsNaN(x) || math.IsInf(x, 0):
		return 0, fmt.Errorf("%s is no number", found(cell))
	}
	return x, nil
}

// add appends a point: a period in s and a value.
func (p *points) add(periodS, value float64, u unit) error {
	if !(periodS >= 0 && periodS <= mostPeriodS) {
		return fmt.Errorf("period: %v s is outside 0 to %v s", periodS, mostPeriodS)
	}
	if n := len(p.table.periods); n > 0 && !(periodS > p.table.periods[n-1]) {
		return fmt.Errorf("period: %v s is not above the one before, %v s", periodS, p.table.periods[n-1])
	}
	if periodS == 0 && u.power > 0 {
		return fmt.Errorf("period: 0 s has no value in %s; such a point is for accelerations", u.name)
	}
	psa := u.psaG(value, periodS)
	if !(psa >= leastPSAg && psa <= mostPSAg) {
		return fmt.Errorf("value: %v %s is a PSA of %s g at %v s, outside %v to %v g", value, u.name, figure(psa), periodS, leastPSAg, mostPSAg)
	}
	p.table.periods = append(p.table.periods, periodS)
	p.table.values = append(p.table.values, psa)
	return nil
}
