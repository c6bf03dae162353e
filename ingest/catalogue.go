package ingest

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"path"
	"strings"
	"sync"
	"sync/atomic"

	"swaybook/ingest/tomlfile"
)

// Catalogue is a table of what people know of records and their files cannot or
// do not say: units and time steps, and the metadata of events, stations and
// records. Its methods may be called from several goroutines at once.
//
// What a row speaks of is in its first columns:
//
//	file             files by name, with * ? [] as wildcards; a name with a slash
//	                 is compared with the whole relative path, one without with
//	                 the base name. In an archive, the path is that inside, the
//	                 whole one (sub/archive.zip!dir/file), or that once unpacked
//	event, station   without file: records by codes
//	event            all records of an event; its columns are those of the event
//	station          all records of a station; its columns are those of the station
//
// and component restricts a row to one direction. Precedence, from strong to
// weak, column by column:
//
//  1. rows with file: a whole path before a base name before wildcards,
//  2. rows with event and station,
//  3. rows with event or station alone,
//  4. what the file's own header says.
//
// Among rows of one rank those with component go before those without, then
// later lines before earlier ones. Event and station of a row with file replace
// the header's codes, and rows without file are compared with the codes as they
// stand after that.
type Catalogue struct {
	// UnknownColumns are the columns of the header that have no meaning here.
	UnknownColumns []UnknownColumn

	nowhere []int           // lines with a position of 0, 0
	torn    sync.Map        // of tornRows: the first file by name
	rows    []*catalogueRow // in order of precedence, weak first
	exact   map[string][]int
	globs   map[string][]int // by what stands before the first wildcard
	joins   map[joinKey][]int
}

// UnknownColumn is a column that was not read, with the known name nearest to
// its own, "" where none is near.
type UnknownColumn struct {
	Name       string
	Suggestion string
}

// String returns the name and the suggestion.
func (u UnknownColumn) String() string {
	return u.Name + tomlfile.DidYouMean(u.Suggestion)
}

// catalogueRow is one row. Of its channel only what the row states is set.
type catalogueRow struct {
	line      int
	file      string
	event     string
	station   string
	network   string
	component string
	unit      string
	stepS     float64
	channel   Channel
	scopes    scope // what the row states
	used      atomic.Bool
}

// joinKey is event and station in lower case, either "" where a row does not
// state it.
type joinKey struct{ event, station string }

// maxCatalogueErrors is how many errors of one catalogue are reported.
const maxCatalogueErrors = 20

// ReadCatalogue reads a catalogue in CSV (RFC 4180) with commas or semicolons,
// lines that begin with # being comments. The first row names the columns, in
// any order and case, and its delimiters are those of all rows: where they are
// semicolons, numbers may have a decimal comma.
//
//	file event station network component
//	event_name origin_time magnitude magnitude_type depth_km
//	event_latitude event_longitude
//	distance_km epicentral_km hypocentral_km rupture_km jb_km
//	station_name station_latitude station_longitude elevation_m vs30_m_s
//	site_class siting instrument azimuth_deg unit dt_s low_cut_hz high_cut_hz
//
// Rows may repeat what they say of an event or a station, and may not contradict
// each other in it. Blank and -999 mean not stated, as does a position of 0, 0,
// which Notes lists. Times are RFC 3339 or a date. The error joins one *ParseError
// for each cell, row or header that is wrong, the first 20 of them, with name as
// their path.
func ReadCatalogue(name string, r io.Reader) (*Catalogue, error) {
	c, faults := readCatalogue(r)
	if len(faults) == 0 {
		c.index()
		return c, nil
	}
	var all []error
	for i, f := range faults {
		if i == maxCatalogueErrors {
			all = append(all, &ParseError{Path: name, Err: fmt.Errorf("%d more errors", len(faults)-i)})
			break
		}
		f.Path = name
		all = append(all, f)
	}
	return nil, errors.Join(all...)
}

func readCatalogue(r io.Reader) (*Catalogue, []*ParseError) {
	text, err := catalogueText(r)
	if err != nil {
		return nil, []*ParseError{err}
	}
	table := csv.NewReader(bytes.NewReader(text))
	table.Comma = catalogueDelimiter(text)
	table.Comment = '#'
	table.FieldsPerRecord = -1
	table.ReuseRecord = true
	c := &Catalogue{}
	columns, faults := c.header(table)
	if len(faults) > 0 {
		return nil, faults
	}
	seen := map[string]int{}
	for {
		cells, err := table.Read()
		if err == io.EOF {
			return c, append(faults, c.contradictions()...)
		}
		if err != nil {
			return nil, append(faults, csvFault(err))
		}
		line, _ := table.FieldPos(0)
		if strings.TrimSpace(strings.Join(cells, "")) == "" {
			continue // spreadsheets leave such rows at the end
		}
		row, bad := readRow(columns, cells, line, table.Comma == ';')
		faults = append(faults, bad...)
		if len(bad) > 0 {
			continue
		}
		key := row.key()
		if first, ok := seen[key]; ok {
			faults = append(faults, refuse(line, "", "the row speaks of the same as line %d", first))
			continue
		}
		seen[key] = line
		if row.dropNowhere() {
			c.nowhere = append(c.nowhere, line)
		}
		c.rows = append(c.rows, row)
	}
}

func catalogueText(r io.Reader) ([]byte, *ParseError) {
	data, err := io.ReadAll(io.LimitReader(r, MaxFileSize+1))
	if err != nil {
		return nil, refuse(0, "", "read catalogue: %w", err)
	}
	if len(data) > MaxFileSize {
		return nil, refuse(0, "", "catalogue is larger than %d MiB", MaxFileSize>>20)
	}
	text, err := NewText(data)
	if pe, ok := errors.AsType[*ParseError](err); ok {
		return nil, pe
	}
	return bytes.Join(text.lines, []byte("\n")), nil
}

// catalogueDelimiter returns the semicolon where the first line that is no
// comment has more of them than commas.
func catalogueDelimiter(text []byte) rune {
	for line := range bytes.Lines(text) {
		if len(bytes.TrimSpace(line)) == 0 || line[0] == '#' {
			continue
		}
		if bytes.Count(line, []byte(";")) > bytes.Count(line, []byte(",")) {
			return ';'
		}
		break
	}
	return ','
}

// csvFault turns an error of the CSV reader into one of ours.
func csvFault(err error) *ParseError {
	if pe, ok := errors.AsType[*csv.ParseError](err); ok {
		return refuse(pe.Line, "", "column %d: %w", pe.Column, pe.Err)
	}
	return refuse(0, "", "%w", err)
}

// header reads the names of the columns; a column without meaning is nil.
func (c *Catalogue) header(table *csv.Reader) ([]*catalogueColumn, []*ParseError) {
	cells, err := table.Read()
	if err != nil {
		if err == io.EOF {
			return nil, []*ParseError{refuse(0, "", "no header row")}
		}
		return nil, []*ParseError{csvFault(err)}
	}
	line, _ := table.FieldPos(0)
	columns := make([]*catalogueColumn, len(cells))
	var faults []*ParseError
	there := map[string]bool{}
	keys := 0
	for i, cell := range cells {
		name := commentKey(latin([]byte(strings.TrimSpace(cell))))
		column, ok := catalogueColumns[name]
		switch {
		case !ok:
			c.UnknownColumns = append(c.UnknownColumns, UnknownColumn{orElse(name, fmt.Sprintf("column %d", i+1)), nearestColumn(name)})
			continue
		case there[name]:
			faults = append(faults, refuse(line, name, "the column is there twice"))
		case name == "file" || name == "event" || name == "station":
			keys++
		}
		there[name] = true
		columns[i] = column
	}
	if keys == 0 && len(faults) == 0 {
		faults = append(faults, refuse(line, "", "none of the columns file, event and station"))
	}
	return columns, faults
}

// readRow reads the cells of one row, numbers in them perhaps with decimal commas,
// and reports all that is wrong with it.
func readRow(columns []*catalogueColumn, cells []string, line int, commas bool) (*catalogueRow, []*ParseError) {
	if len(cells) != len(columns) {
		return nil, []*ParseError{refuse(line, "", "%d fields, the header has %d", len(cells), len(columns))}
	}
	row := &catalogueRow{line: line}
	var faults []*ParseError
	for i, column := range columns {
		if column == nil {
			continue
		}
		text := latin([]byte(strings.TrimSpace(cells[i])))
		if commas && column.number {
			text = withPoint("", text)
		}
		if isNotStated(text) {
			continue
		}
		if err := column.set(row, text); err != nil {
			faults = append(faults, refuse(line, column.name, "%w", err))
			continue
		}
		row.scopes |= column.scope
	}
	if len(faults) == 0 {
		if err := row.validate(); err != nil {
			faults = append(faults, refuse(line, "", "%w", err))
		}
	}
	return row, faults
}

// isNotStated reports whether a cell is blank or -999.
func isNotStated(text string) bool {
	if text == "" {
		return true
	}
	v, ok := parseNumber([]byte(text))
	return ok && v == -999
}

// validate holds a row to what its first columns let it speak of.
func (row *catalogueRow) validate() error {
	e, s := &row.channel.Event, &row.channel.Station
	low, high := row.channel.LowCutHz, row.channel.HighCutHz
	switch {
	case row.file == "" && row.event == "" && row.station == "":
		return errors.New("the row states neither file nor event nor station")
	case row.network != "" && row.station == "" && row.file == "":
		return errors.New("network needs a station")
	case row.scopes&scopeFile != 0 && row.file == "":
		return errors.New("unit and dt_s need a file, since they are wanted before a file is read")
	case row.scopes&scopeEvent != 0 && row.file == "" && row.event == "":
		return errors.New("the event's columns need an event or a file")
	case row.scopes&scopeStation != 0 && row.file == "" && row.station == "":
		return errors.New("the station's columns need a station or a file")
	case row.scopes&scopeRecord != 0 && row.file == "" && (row.event == "" || row.station == ""):
		return errors.New("distance_km, low_cut_hz and high_cut_hz need event and station, or a file")
	case e.Latitude.Known != e.Longitude.Known:
		return errors.New("event_latitude and event_longitude need each other")
	case s.Latitude.Known != s.Longitude.Known:
		return errors.New("station_latitude and station_longitude need each other")
	case low.Known && high.Known && low.Value >= high.Value:
		return fmt.Errorf("low_cut_hz %g is not below high_cut_hz %g", low.Value, high.Value)
	}
	return nil
}

// dropNowhere makes positions of 0, 0 unknown, which is how tables leave them out, and
// reports whether there was one.
func (row *catalogueRow) dropNowhere() bool {
	e, s := &row.channel.Event, &row.channel.Station
	event, station := e.Latitude.Known, s.Latitude.Known
	e.Latitude, e.Longitude = position(e.Latitude, e.Longitude)
	s.Latitude, s.Longitude = position(s.Latitude, s.Longitude)
	return event != e.Latitude.Known || station != s.Latitude.Known
}

// key tells rows apart that may stand beside each other.
func (row *catalogueRow) key() string {
	return strings.Join([]string{
		row.file, strings.ToLower(row.component),
		strings.ToLower(row.fileless(row.event)), strings.ToLower(row.fileless(row.station)), strings.ToLower(row.fileless(row.network)),
	}, "\x00")
}

// fileless returns a code that is part of the row's key: with a file, codes are
// statements.
func (row *catalogueRow) fileless(code string) string {
	if row.file != "" {
		return ""
	}
	return code
}

// setFile takes a pattern for the relative path or the base name.
func (row *catalogueRow) setFile(text string) error {
	pattern := path.Clean(strings.ReplaceAll(text, `\`, "/"))
	if _, err := path.Match(pattern, ""); err != nil {
		return fmt.Errorf("%s is no pattern of file names", found(text))
	}
	row.file = pattern
	return nil
}
