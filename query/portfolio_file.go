package query

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// draft is a structure as its file has it.
type draft struct {
	line    int
	entries []entry
	modes   []modeDraft
}

// modeDraft is a mode of a draft.
type modeDraft struct {
	number  int // from 1
	entries []entry
}

// entry is one filled cell of a CSV file, or one key of a TOML file.
type entry struct {
	name, text string
	line       int
}

// mode returns the entries of a mode by its number, which it makes where it is new.
func (d *draft) mode(number int) *[]entry {
	for i := range d.modes {
		if d.modes[i].number == number {
			return &d.modes[i].entries
		}
	}
	d.modes = append(d.modes, modeDraft{number: number})
	return &d.modes[len(d.modes)-1].entries
}

// maxPortfolio bounds a portfolio's file, in bytes.
const maxPortfolio = 64 << 20

// fileError is a mistake in a file of structures.
type fileError struct {
	line int // 0 where it is of no one line
	key  string
	err  error
}

func (e *fileError) Error() string {
	text := ""
	if e.line > 0 {
		text = strconv.Itoa(e.line) + ": "
	}
	if e.key != "" {
		text += e.key + ": "
	}
	return text + e.err.Error()
}

// readDrafts reads a file of structures, TOML or CSV by its content.
func readDrafts(path string) ([]draft, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	text, err := io.ReadAll(io.LimitReader(file, maxPortfolio+1))
	switch {
	case err != nil:
		return nil, err
	case len(text) > maxPortfolio:
		return nil, fmt.Errorf("is larger than %d bytes", maxPortfolio)
	}
	return parseDrafts(text)
}

// parseDrafts reads what a file of structures holds.
func parseDrafts(text []byte) ([]draft, error) {
	if bytes.HasPrefix(text, []byte("\xff\xfe")) || bytes.HasPrefix(text, []byte("\xfe\xff")) {
		return nil, errors.New("is UTF-16; save it as UTF-8")
	}
	text = bytes.TrimPrefix(text, []byte("\xef\xbb\xbf"))
	number := 0
	for line := range bytes.Lines(text) {
		if number++; !utf8.Valid(line) {
			return nil, &fileError{number, "", errors.New("is not UTF-8; save the file as UTF-8")}
		}
	}
	if isTOML(text) {
		return tomlDrafts(text)
	}
	return csvDrafts(text)
}

// isTOML looks at the first line that is neither empty nor a comment: it begins a table or
// sets a key, while that of a CSV file names columns.
func isTOML(text []byte) bool {
	for line := range bytes.Lines(text) {
		line = bytes.TrimSpace(line)
		if len(line) > 0 && line[0] != '#' {
			return line[0] == '[' || bytes.HasPrefix(line, []byte("structure"))
		}
	}
	return false
}

// csvDrafts reads a row a structure below names of columns, split by commas, semicolons or
// tabs. Lines that begin with # do not count.
func csvDrafts(text []byte) ([]draft, error) {
	r := csv.NewReader(bytes.NewReader(text))
	r.Comma, r.Comment, r.TrimLeadingSpace = separatorOf(text), '#', true
	r.ReuseRecord = true
	names, err := r.Read()
	if errors.Is(err, io.EOF) {
		return nil, errors.New("holds nothing")
	}
	if err != nil {
		return nil, csvError(err)
	}
	columns := make([]columnName, len(names))
	for i, name := range names {
		line, _ := r.FieldPos(i)
		if strings.TrimSpace(name) == "" {
			continue // of spreadsheets, over empty cells
		}
		if columns[i], err = parseColumnName(name); err != nil {
			return nil, &fileError{line, "", err}
		}
	}
	var out []draft
	for {
		row, err := r.Read()
		if errors.Is(err, io.EOF) {
			return out, nil
		}
		if err != nil {
			return nil, csvError(err)
		}
		line, _ := r.FieldPos(0)
		d := draft{line: line}
		for i, cell := range row {
			if cell = strings.TrimSpace(cell); cell == "" {
				continue
			}
			if columns[i].name == "" {
				return nil, &fileError{line, "", fmt.Errorf("%q stands in a column without a name", cell)}
			}
			into := &d.entries
			if columns[i].mode > 0 {
				into = d.mode(columns[i].mode)
			}
			*into = append(*into, entry{columns[i].name, cell, line})
		}
		if len(d.entries)+len(d.modes) > 0 {
			out = append(out, d)
		}
	}
}

// columnName is the name of a column, of mode number where that is above 0.
type columnName struct {
	mode int
	name string
}

// parseColumnName reads "height_m" and "mode2_period_s".
func parseColumnName(text string) (columnName, error) {
	name := strings.ToLower(strings.TrimSpace(text))
	rest, isMode := strings.CutPrefix(name, "mode")
	if !isMode {
		return columnName{0, name}, checkEntryName(name, structureEntries)
	}
	number, inner, _ := strings.Cut(rest, "_")
	n, err := strconv.Atoi(number)
	if err != nil || n < 1 || n > maxModes {
		return columnName{}, fmt.Errorf("column %q: want mode1_period and the like, modes 1 to %d", text, maxModes)
	}
	return columnName{n, inner}, checkEntryName(inner, modeEntries)
}

func csvError(err error) error {
	if at, ok := errors.AsType[*csv.ParseError](err); ok {
		return &fileError{at.Line, "", at.Err}
	}
	return err
}

// separatorOf is the separator that the first line which counts has most of.
func separatorOf(text []byte) rune {
	for line := range bytes.Lines(text) {
		if line = bytes.TrimSpace(line); len(line) == 0 || line[0] == '#' {
			continue
		}
		best := ','
		for _, r := range ";\t" {
			if bytes.Count(line, []byte(string(r))) > bytes.Count(line, []byte(string(best))) {
				best = r
			}
		}
		return best
	}
	return ','
}

// tomlDrafts reads [[structure]] tables with [[structure.mode]] tables.
func tomlDrafts(text []byte) ([]draft, error) {
	var all map[string]any
	if err := toml.Unmarshal(text, &all); err != nil {
		line := 0
		if at, ok := errors.AsType[*toml.DecodeError](err); ok {
			line, _ = at.Position()
		}
		return nil, &fileError{line, "", errors.New(strings.TrimPrefix(err.Error(), "toml: "))}
	}
	var t tomlReader
	parser := unstable.Parser{}
	parser.Reset(text)
	for parser.NextExpression() {
		e := parser.Expression()
		line := 1 + bytes.Count(text[:offsetOf(e)], []byte("\n"))
		if err := t.take(e, line); err != nil {
			return nil, err
		}
	}
	return t.drafts, parser.Error()
}

// offsetOf is where the expression's first key begins.
func offsetOf(e *unstable.Node) int {
	keys := e.Key()
	keys.Next()
	return int(keys.Node().Raw.Offset)
}

// tomlReader takes the expressions of a document one after another.
type tomlReader struct {
	drafts []draft
	into   *[]entry // of the table at hand
	known  []entryKind
}

func (t *tomlReader) take(e *unstable.Node, line int) error {
	name := keyOf(e)
	switch {
	case e.Kind == unstable.ArrayTable && name == "structure":
		t.drafts = append(t.drafts, draft{line: line})
		t.into, t.known = &t.drafts[len(t.drafts)-1].entries, structureEntries
		return nil
	case e.Kind == unstable.ArrayTable && name == "structure.mode" && len(t.drafts) > 0:
		d := &t.drafts[len(t.drafts)-1]
		t.into, t.known = d.mode(len(d.modes)+1), modeEntries
		return nil
	case e.Kind != unstable.KeyValue || t.into == nil:
		return &fileError{line, name, errors.New("want [[structure]] tables, and [[structure.mode]] tables in them")}
	}
	if err := checkEntryName(name, t.known); err != nil {
		return &fileError{line, "", err}
	}
	switch v := e.Value(); v.Kind {
	case unstable.String:
		*t.into = append(*t.into, entry{name, string(v.Data), line})
		return nil
	case unstable.Integer, unstable.Float:
		*t.into = append(*t.into, entry{name, strings.ReplaceAll(string(v.Data), "_", ""), line})
		return nil
	}
	return &fileError{line, name, errors.New("want a text or a number")}
}

func keyOf(e *unstable.Node) string {
	var parts []string
	for keys := e.Key(); keys.Next(); {
		parts = append(parts, string(keys.Node().Data))
	}
	return strings.Join(parts, ".")
}
