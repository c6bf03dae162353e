package ingest

import (
	"cmp"
	"fmt"
	"math"
	"path"
	"slices"
	"strings"

	"swaybook/ingest/archive"
)

// The ranks of rows, weak first.
const (
	rankCode = iota // event or station alone
	rankPair        // event and station
	rankGlob        // files by wildcard
	rankBase        // a file by base name
	rankPath        // a file by path
)

// wildcards begin what is not literal in a pattern; no backslash is left in one.
const wildcards = "*?["

func (row *catalogueRow) rank() int {
	switch {
	case strings.ContainsAny(row.file, wildcards):
		return rankGlob
	case strings.ContainsAny(row.file, "/"+archive.Separator):
		return rankPath
	case row.file != "":
		return rankBase
	case row.event != "" && row.station != "":
		return rankPair
	}
	return rankCode
}

// index sorts the rows by precedence, weak first, and builds the tables by
// which they are found.
func (c *Catalogue) index() {
	slices.SortStableFunc(c.rows, func(a, b *catalogueRow) int {
		return cmp.Or(cmp.Compare(a.rank(), b.rank()), compareBool(a.component != "", b.component != ""), cmp.Compare(a.line, b.line))
	})
	c.exact, c.globs = map[string][]int{}, map[string][]int{}
	c.joins = map[joinKey][]int{}
	for i, row := range c.rows {
		switch row.rank() {
		case rankGlob:
			prefix := row.file[:strings.IndexAny(row.file, wildcards)]
			c.globs[prefix] = append(c.globs[prefix], i)
		case rankBase, rankPath:
			c.exact[row.file] = append(c.exact[row.file], i)
		default:
			key := joinKey{joinName(row.event), joinName(row.station)}
			c.joins[key] = append(c.joins[key], i)
		}
	}
}

func compareBool(a, b bool) int {
	switch {
	case a == b:
		return 0
	case b:
		return -1
	}
	return 1
}

// fileRows returns the rows whose file fits the relative path, weak first. A pattern is
// held against the file only where it begins as one of its names does: a catalogue may
// have as many patterns as there are records.
func (c *Catalogue) fileRows(rel string) []*catalogueRow {
	base, paths := namesOf(path.Clean(rel))
	at := slices.Clone(c.exact[base])
	for _, p := range paths {
		at = append(at, c.exact[p]...)
	}
	for _, name := range append(paths, base) {
		for n := range len(name) + 1 {
			for _, i := range c.globs[name[:n]] {
				if matchesFile(c.rows[i].file, base, paths) {
					at = append(at, i)
				}
			}
		}
	}
	return c.ordered(at)
}

// matchesFile compares a pattern with the base name, or with the paths if it
// speaks of folders or archives. The archives' separator may be in a class, too.
func matchesFile(pattern, base string, paths []string) bool {
	matches := func(name string) bool {
		ok, _ := path.Match(pattern, name) // the pattern is known to be good
		return ok
	}
	switch {
	case strings.Contains(pattern, "/"):
		return slices.ContainsFunc(paths, matches)
	case strings.Contains(pattern, archive.Separator):
		return matches(base) || slices.ContainsFunc(paths, matches)
	}
	return matches(base)
}

// namesOf returns the base name and the paths by which a row may call the file
// with this relative path. Those of a member of an archive are the whole one, that
// inside the archive, or each of several, and that which it has once unpacked.
func namesOf(rel string) (base string, paths []string) {
	parts := archive.Split(rel)
	for i := range parts {
		paths = append(paths, strings.Join(parts[i:], archive.Separator))
	}
	return path.Base(parts[len(parts)-1]), append(paths, archive.InPlace(rel))
}

func (c *Catalogue) ordered(at []int) []*catalogueRow {
	slices.Sort(at)
	rows := make([]*catalogueRow, 0, len(at))
	for _, i := range slices.Compact(at) {
		rows = append(rows, c.rows[i])
	}
	return rows
}

// Hints returns what the catalogue says of unit and time step of the file at a
// slash-separated relative path, and base for what it does not say: a row that
// names a file is more definite than what is said of all files.
func (c *Catalogue) Hints(rel string, base Hints) Hints {
	h := base
	for _, row := range c.fileRows(rel) {
		if row.component == "" {
			row.used.Store(true)
		}
		if row.unit != "" {
			h.Unit, h.UnitFrom, h.UnitForAll = row.unit, rowName(row), false
		}
		if row.stepS != 0 {
			h.StepS, h.StepFrom, h.StepForAll = row.stepS, rowName(row), false
		}
	}
	return h
}

func rowName(row *catalogueRow) string { return fmt.Sprintf("catalogue line %d", row.line) }

// Apply puts what the catalogue says into the channel of the file at a
// slash-separated relative path and reports whether any row fits. The channel's
// own direction decides about rows with component; where it has none, and one
// row with component fits the file, that row gives it.
//
// Rows without file join by codes and never change them; but where the header
// gives the event no ID, the event of a row that joins becomes it. So whatever
// else the row changes, the event keeps its code and joins again.
//
// stated holds nothing but what the rows say, under the codes of the channel,
// so that it can replace what another file's header said of the same event or
// station.
func (c *Catalogue) Apply(rel string, ch *Channel) (stated Stated, matched bool) {
	files := c.fileRows(rel)
	c.noteTorn(rel, giveDirection(files, ch))
	files = slices.DeleteFunc(files, func(row *catalogueRow) bool { return !row.fits(ch.Orientation) })
	for _, row := range files {
		row.setCodes(ch)
	}
	stated.Orientation = ch.Orientation
	rows := append(c.joinRows(ch), files...)
	for _, row := range rows {
		row.used.Store(true)
		row.apply(ch)
		row.state(&stated)
	}
	stated.Event.ID = EventCode(ch)
	stated.Station.Network, stated.Station.Code = ch.Station.Network, StationCode(ch)
	return stated, len(rows) > 0
}

// Stated is what the rows of a catalogue say of a channel, its event and its station.
type Stated struct {
	Channel // all of it

	// ByCode is what rows say that name the event or the station they speak of, and
	// ByFile what those say that name the file alone. The former say one thing, since
	// contradictions are refused; of the latter nobody knows of which event and station
	// they speak until the files are read.
	ByCode, ByFile Channel
}

// state adds what the row states.
func (row *catalogueRow) state(to *Stated) {
	row.apply(&to.Channel)
	if row.file == "" {
		row.apply(&to.ByCode)
		return
	}
	event, station := to.ByFile.Event, to.ByFile.Station
	row.apply(&to.ByFile)
	if row.event != "" {
		to.ByFile.Event = event
		applyEvent(&to.ByCode.Event, &row.channel.Event)
	}
	if row.station != "" {
		to.ByFile.Station = station
		applyStation(&to.ByCode.Station, &row.channel.Station)
	}
}

// GiveDirection gives the channel of the file at a slash-separated relative path the
// direction of the catalogue's only row for it with a component, where it has none.
func (c *Catalogue) GiveDirection(rel string, ch *Channel) { giveDirection(c.fileRows(rel), ch) }

// giveDirection gives a channel without direction that of the rows with component,
// where they agree; where not, it returns the first two that differ.
func giveDirection(files []*catalogueRow, ch *Channel) (torn [2]*catalogueRow) {
	if ch.Orientation.Axis != AxisUnknown {
		return torn
	}
	var only *catalogueRow
	for _, row := range files {
		switch {
		case row.component == "":
		case only == nil:
			only = row
		case !sameComponent(only.component, row.component):
			return [2]*catalogueRow{only, row}
		}
	}
	if only != nil {
		if o, ok := direction(only.component); ok {
			ch.Orientation = o
		}
	}
	return torn
}

// sameComponent reports whether two cells name one direction.
func sameComponent(a, b string) bool {
	one, okOne := direction(a)
	other, okOther := direction(b)
	return strings.EqualFold(a, b) || okOne && okOther && one.same(other)
}

// fits reports whether the row is not restricted to another direction.
func (row *catalogueRow) fits(o Orientation) bool {
	if row.component == "" || strings.EqualFold(row.component, o.Label) {
		return true
	}
	want, ok := direction(row.component)
	if !ok {
		return false
	}
	label, labelled := direction(o.Label)
	return want.same(o) || labelled && want.same(label)
}

// setCodes replaces the channel's codes by those of a row with file.
func (row *catalogueRow) setCodes(ch *Channel) {
	ch.Event.ID = orElse(row.event, ch.Event.ID)
	ch.Station.Code = orElse(row.station, ch.Station.Code)
	ch.Station.Network = orElse(row.network, ch.Station.Network)
}

// joinRows returns the rows without file that fit the channel's codes, weak
// first.
func (c *Catalogue) joinRows(ch *Channel) []*catalogueRow {
	var at []int
	for _, event := range append(eventKeys(ch), "") {
		for _, station := range append(stationKeys(ch), "") {
			for _, i := range c.joins[joinKey{event, station}] {
				row := c.rows[i]
				if (row.network == "" || strings.EqualFold(row.network, ch.Station.Network)) && row.fits(ch.Orientation) {
					at = append(at, i)
				}
			}
		}
	}
	return c.ordered(at)
}

// eventKeys are the names by which a row may call the channel's event.
func eventKeys(ch *Channel) []string {
	return keys(ch.Event.ID, EventCode(ch), ch.Event.Name)
}

// stationKeys are the names by which a row may call the channel's station.
func stationKeys(ch *Channel) []string {
	s := &ch.Station
	if s.Code == "" || s.Network == "" {
		return keys(s.Code)
	}
	return keys(s.Code, s.Network+s.Code, s.Network+"."+s.Code)
}

func keys(names ...string) []string {
	var out []string
	for _, n := range names {
		if n = joinName(n); n != "" && !slices.Contains(out, n) {
			out = append(out, n)
		}
	}
	return out
}

// joinName is a code or name as it is compared: as in an id, without case.
func joinName(s string) string { return clean(strings.ToLower(s), "", maxPart) }

// apply puts what the row states into the channel.
func (row *catalogueRow) apply(ch *Channel) {
	from := &row.channel
	ch.Event.ID = orElse(ch.Event.ID, row.event)
	applyEvent(&ch.Event, &from.Event)
	applyStation(&ch.Station, &from.Station)
	ch.Instrument = orElse(from.Instrument, ch.Instrument)
	ch.DistanceKM = from.DistanceKM.Or(ch.DistanceKM)
	ch.Distances = from.Distances.Or(ch.Distances)
	ch.LowCutHz = from.LowCutHz.Or(ch.LowCutHz)
	ch.HighCutHz = from.HighCutHz.Or(ch.HighCutHz)
	if from.Siting != "" {
		ch.Siting = from.Siting
	}
	if azimuth := from.Orientation.AzimuthDeg; azimuth.Known && ch.Orientation.Axis != AxisVertical {
		ch.Orientation.Axis = AxisHorizontal
		ch.Orientation.AzimuthDeg = Known(math.Mod(azimuth.Value, 360))
		ch.Orientation.Order = 0
	}
}

// applyEvent keeps magnitude and type together: a magnitude without type is of
// unknown type, not of the header's.
func applyEvent(to, from *Event) {
	to.Name = orElse(from.Name, to.Name)
	if !from.Origin.IsZero() {
		to.Origin, to.Date = from.Origin, from.Date
	}
	if !from.Date.IsZero() {
		to.Date = from.Date
	}
	to.Latitude = from.Latitude.Or(to.Latitude)
	to.Longitude = from.Longitude.Or(to.Longitude)
	to.DepthKM = from.DepthKM.Or(to.DepthKM)
	if from.Magnitude.Known {
		to.Magnitude, to.MagnitudeType = from.Magnitude, ""
	}
	to.MagnitudeType = orElse(from.MagnitudeType, to.MagnitudeType)
}

func applyStation(to, from *Station) {
	to.Name = orElse(from.Name, to.Name)
	to.Latitude = from.Latitude.Or(to.Latitude)
	to.Longitude = from.Longitude.Or(to.Longitude)
	to.ElevationM = from.ElevationM.Or(to.ElevationM)
	to.Vs30 = from.Vs30.Or(to.Vs30)
	to.SiteClass = orElse(from.SiteClass, to.SiteClass)
}

// Unmatched returns the lines of the rows that fitted nothing so far, in order.
func (c *Catalogue) Unmatched() []int {
	var lines []int
	for _, row := range c.rows {
		if !row.used.Load() {
			lines = append(lines, row.line)
		}
	}
	slices.Sort(lines)
	return lines
}
