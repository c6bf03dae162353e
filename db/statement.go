package db

import (
	"cmp"
	"context"
	"fmt"
	"slices"
	"strings"
	"time"
)

// Subject is what a statement speaks of.
type Subject struct {
	Kind string // SubjectEvent, SubjectStation or SubjectRecord
	ID   int64
}

// The kinds of subjects.
const (
	SubjectEvent   = "event"
	SubjectStation = "station"
	SubjectRecord  = "record"
)

// The attributes of statements. A value is text: numbers in full digits, a
// position as "latitude longitude" in degrees, a magnitude as "6.1 Mw" or "6.1",
// a time as RFC 3339 in UTC, an identifier as "scheme:code".
const (
	AttributeIdentifier  = "identifier"
	AttributeName        = "name"
	AttributeOriginTime  = "origin_time"
	AttributePosition    = "position"
	AttributeDepth       = "depth_km"
	AttributeMagnitude   = "magnitude"
	AttributeElevation   = "elevation_m"
	AttributeVs30        = "vs30_m_s"
	AttributeSiteClass   = "site_class"
	AttributeDistance    = "distance_km" // of unknown kind
	AttributeEpicentral  = "epicentral_km"
	AttributeHypocentral = "hypocentral_km"
	AttributeRupture     = "rupture_km"
	AttributeJoynerBoore = "jb_km"
)

// Who can state something, the strongest first: of several values the first is
// taken, and among those stated by one, that of the source first by name. The rows of
// a catalogue that name a file, which is their source, come before those that name an
// event or a station, of which CodeRows is.
const (
	ByCatalogue = "catalogue"
	ByMetadata  = "metadata" // StationXML and QuakeML
	ByComputed  = "computed" // from other statements
	ByHeader    = "header"

	CodeRows = "catalogue"
)

// statedBy lists them in that order, between the two kinds of codes.
var statedBy = []string{firstCode, ByCatalogue, ByMetadata, ByComputed, ByHeader, otherCode}

// Statement is one value that somebody gives an attribute.
type Statement struct {
	Subject
	Attribute string
	By        string
	Value     string
	Source    string // the file, CodeRows, "" where not kept
}

// State keeps a statement and reports whether it is new. One by the catalogue's rows
// for codes, by metadata or computed replaces what the same said before; headers of
// several files and rows of the catalogue for them may differ, and all that they say is
// kept.
func (t *Tx) State(ctx context.Context, s Statement) (isNew bool, err error) {
	r, err := t.tx.ExecContext(ctx, `INSERT INTO statement (subject, subject_id, attribute, stated_by, value, source) VALUES (?, ?, ?, ?, ?, ?)
		ON CONFLICT DO UPDATE SET source = excluded.source WHERE excluded.source < source`, s.Kind, s.ID, s.Attribute, s.By, s.Value, s.Source)
	if err != nil {
		return false, fmt.Errorf("store statement: %w", err)
	}
	n, err := r.RowsAffected()
	if err != nil || n == 0 || s.isOfOneFile() {
		return n > 0, err
	}
	err = t.exec(ctx, `DELETE FROM statement WHERE subject = ? AND subject_id = ? AND attribute = ? AND stated_by = ? AND value <> ?
		AND (stated_by <> '`+ByCatalogue+`' OR source = '`+CodeRows+`')`,
		s.Kind, s.ID, s.Attribute, s.By, s.Value)
	if err != nil {
		return false, fmt.Errorf("store statement: %w", err)
	}
	return true, nil
}

// isOfOneFile reports whether another file may say something else.
func (s *Statement) isOfOneFile() bool {
	return s.By == ByHeader || s.By == ByCatalogue && s.Source != CodeRows
}

// Supersede forgets what the catalogue said before of the subjects of which it speaks
// now: of each attribute that it states, every other value that a row for the file or one
// for codes gave. It returns what it forgot.
func (t *Tx) Supersede(ctx context.Context, file string, now []Statement) ([]Statement, error) {
	type topic struct {
		Subject
		attribute string
	}
	values := map[topic][]string{}
	for _, s := range now {
		of := topic{s.Subject, s.Attribute}
		values[of] = append(values[of], s.Value)
	}
	var superseded []Statement
	for of, stated := range values {
		// Files of an event or a station may have thousands of rows, each with values of its
		// own: these are passed over where they lie.
		rows, err := t.tx.QueryContext(ctx, `SELECT subject, subject_id, attribute, stated_by, value, source FROM statement
			WHERE subject = ? AND subject_id = ? AND attribute = ? AND stated_by = '`+ByCatalogue+`' AND source IN (?, '`+CodeRows+`')`,
			of.Kind, of.ID, of.attribute, file)
		if err != nil {
			return nil, fmt.Errorf("read statements: %w", err)
		}
		held, err := collect(rows, statementFields)
		if err != nil {
			return nil, fmt.Errorf("read statements: %w", err)
		}
		for _, h := range held {
			if slices.Contains(stated, h.Value) {
				continue
			}
			if err := t.exec(ctx, `DELETE FROM statement WHERE subject = ? AND subject_id = ? AND attribute = ? AND stated_by = ? AND value = ?`,
				h.Kind, h.ID, h.Attribute, h.By, h.Value); err != nil {
				return nil, fmt.Errorf("forget statement: %w", err)
			}
			superseded = append(superseded, h)
		}
	}
	return superseded, nil
}

// CopyStatements gives a subject what headers and metadata state of another of its
// kind.
func (t *Tx) CopyStatements(ctx context.Context, from, to Subject) error {
	err := t.exec(ctx, `INSERT INTO statement SELECT subject, ?, attribute, stated_by, value, source FROM statement
		WHERE subject = ? AND subject_id = ? AND stated_by IN ('header', 'metadata') ON CONFLICT DO NOTHING`, to.ID, from.Kind, from.ID)
	if err != nil {
		return fmt.Errorf("copy statements: %w", err)
	}
	return nil
}

// Unstate forgets what somebody stated of an attribute, and reports whether there was
// anything.
func (t *Tx) Unstate(ctx context.Context, of Subject, attribute, by string) (bool, error) {
	r, err := t.tx.ExecContext(ctx, `DELETE FROM statement WHERE subject = ? AND subject_id = ? AND attribute = ? AND stated_by = ?`,
		of.Kind, of.ID, attribute, by)
	if err != nil {
		return false, fmt.Errorf("forget statement: %w", err)
	}
	n, err := r.RowsAffected()
	return n > 0, err
}

// Statements returns what is stated of a subject, by attribute, the value to take
// first.
func (t *Tx) Statements(ctx context.Context, of Subject) ([]Statement, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT subject, subject_id, attribute, stated_by, value, source FROM statement
		WHERE subject = ? AND subject_id = ?`, of.Kind, of.ID)
	if err != nil {
		return nil, fmt.Errorf("read statements: %w", err)
	}
	found, err := collect(rows, statementFields)
	SortStatements(found)
	return found, err
}

// SortStatements orders statements by attribute, the value to take first.
func SortStatements(s []Statement) {
	slices.SortFunc(s, func(a, b Statement) int {
		return cmp.Or(strings.Compare(a.Attribute, b.Attribute), cmp.Compare(slices.Index(statedBy, a.By), slices.Index(statedBy, b.By)),
			cmp.Compare(a.codeRows(), b.codeRows()), strings.Compare(a.Source, b.Source), strings.Compare(a.Value, b.Value))
	})
}

// codeRows is 1 for what rows of the catalogue for codes say, 0 for all else.
func (s *Statement) codeRows() int {
	if s.By == ByCatalogue && s.Source == CodeRows {
		return 1
	}
	return 0
}

func statementFields(s *Statement) []any {
	return []any{&s.Kind, &s.ID, &s.Attribute, &s.By, &s.Value, &s.Source}
}

// EventKey is an event's identity in the store.
type EventKey struct {
	ID   int64
	Code string
}

// EventsWithin returns the events whose own origin times lie in the span.
func (t *Tx) EventsWithin(ctx context.Context, from, to time.Time) ([]EventKey, error) {
	// Fractions of a second sort oddly as text: a second more on both sides.
	return t.eventKeys(ctx, `own_origin BETWEEN ? AND ?`, timeText(from.Add(-time.Second)), timeText(to.Add(time.Second)))
}

// EventsAlike returns the event, those that share an identifier with it, and those
// that stand for one another with it.
func (t *Tx) EventsAlike(ctx context.Context, id int64) ([]EventKey, error) {
	// The cross join keeps the order: from what the event states to who else does.
	return t.eventKeys(ctx, `id IN (
			SELECT ?1
			UNION SELECT b.subject_id FROM statement a CROSS JOIN statement b ON b.attribute = 'identifier' AND b.value = a.value
				WHERE a.subject = 'event' AND a.subject_id = ?1 AND a.attribute = 'identifier'
			UNION SELECT primary_id FROM event WHERE id = ?1
			UNION SELECT id FROM event WHERE primary_id = ?1
			UNION SELECT o.id FROM event e JOIN event o ON o.primary_id = e.primary_id WHERE e.id = ?1)`, id)
}

// EventKey returns the key of the event with this id, which must exist.
func (t *Tx) EventKey(ctx context.Context, id int64) (EventKey, error) {
	found, err := t.eventKeys(ctx, `id = ?`, id)
	if err == nil && len(found) == 0 {
		err = fmt.Errorf("read events: no event %d", id)
	}
	if err != nil {
		return EventKey{}, err
	}
	return found[0], nil
}

// FindEvent returns the event of this code; ok is false where there is none.
func (t *Tx) FindEvent(ctx context.Context, code string) (k EventKey, ok bool, err error) {
	found, err := t.eventKeys(ctx, `code = ?`, code)
	if err != nil || len(found) == 0 {
		return k, false, err
	}
	return found[0], true, nil
}

func (t *Tx) eventKeys(ctx context.Context, where string, args ...any) ([]EventKey, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT id, code FROM event WHERE `+where+` ORDER BY code`, args...)
	if err != nil {
		return nil, fmt.Errorf("read events: %w", err)
	}
	return collect(rows, func(k *EventKey) []any { return []any{&k.ID, &k.Code} })
}

// SetEvent stores what is taken of an event's statements, the origin time of its own
// ones, and the event that stands for it. It reports whether anything changed.
func (t *Tx) SetEvent(ctx context.Context, id, primaryID int64, ownOrigin time.Time, e Event) (changed bool, err error) {
	var primary any
	if primaryID != id {
		primary = primaryID
	}
	return t.changed(ctx, "event", id, []assignment{
		{"primary_id", primary}, {"own_origin", timeText(ownOrigin)}, {"name", textOrNull(e.Name)}, {"origin_time", timeText(e.Origin)},
		{"latitude_deg", e.LatitudeDeg}, {"longitude_deg", e.LongitudeDeg}, {"depth_km", e.DepthKM}, {"magnitude", e.Magnitude},
		{"magnitude_type", textOrNull(e.MagnitudeType)},
	})
}

// SetStation stores what is taken of a station's statements and reports whether
// anything changed.
func (t *Tx) SetStation(ctx context.Context, id int64, s Station) (changed bool, err error) {
	return t.changed(ctx, "station", id, []assignment{
		{"name", textOrNull(s.Name)}, {"latitude_deg", s.LatitudeDeg}, {"longitude_deg", s.LongitudeDeg}, {"elevation_m", s.ElevationM},
		{"vs30_m_s", s.Vs30MPS}, {"site_class", textOrNull(s.SiteClass)},
	})
}

// SetDistances stores what is taken of a record's statements.
func (t *Tx) SetDistances(ctx context.Context, recordID int64, d Distances) error {
	_, err := t.changed(ctx, "record", recordID, []assignment{
		{"distance_km", d.BestKM}, {"epicentral_km", d.EpicentralKM}, {"hypocentral_km", d.HypocentralKM},
		{"rupture_km", d.RuptureKM}, {"jb_km", d.JoynerBooreKM},
	})
	return err
}

// assignment gives a column a value.
type assignment struct {
	column string
	value  any
}

// changed assigns to a row and reports whether that made a difference. Names are
// constants of this package.
func (t *Tx) changed(ctx context.Context, table string, id int64, to []assignment) (bool, error) {
	var sets, differs string
	var args []any
	for i, a := range to {
		if i > 0 {
			sets, differs = sets+", ", differs+" OR "
		}
		sets += fmt.Sprintf("%s = ?%d", a.column, i+2)
		differs += fmt.Sprintf("%s IS NOT ?%d", a.column, i+2)
		args = append(args, a.value)
	}
	r, err := t.tx.ExecContext(ctx, `UPDATE `+table+` SET `+sets+` WHERE id = ?1 AND (`+differs+`)`, append([]any{id}, args...)...)
	if err != nil {
		return false, fmt.Errorf("describe %s: %w", table, err)
	}
	n, err := r.RowsAffected()
	return n > 0, err
}

// Relations counts the event codes for which another stands, and the components
// that hold a motion which another holds too, beyond the first.
func (t *Tx) Relations(ctx context.Context) (joined, duplicates int, err error) {
	err = t.tx.QueryRowContext(ctx, `SELECT (SELECT count(*) FROM event WHERE primary_id IS NOT NULL),
		(SELECT count(*) FROM component WHERE motion_id <> id)`).Scan(&joined, &duplicates)
	if err != nil {
		return 0, 0, fmt.Errorf("count relations: %w", err)
	}
	return joined, duplicates, nil
}

// RecordPlace is where a record's earthquake and its station are. Nil is unknown.
type RecordPlace struct {
	RecordID                     int64
	EventLatDeg, EventLonDeg     *float64
	DepthKM                      *float64
	StationLatDeg, StationLonDeg *float64
}

// Places returns the records of a subject, itself where it is a record.
func (t *Tx) Places(ctx context.Context, of Subject) ([]RecordPlace, error) {
	where := map[string]string{SubjectEvent: "r.event_id", SubjectStation: "r.station_id", SubjectRecord: "r.id"}[of.Kind]
	rows, err := t.tx.QueryContext(ctx, `SELECT r.id, e.latitude_deg, e.longitude_deg, e.depth_km, s.latitude_deg, s.longitude_deg
		FROM record r LEFT JOIN event e ON e.id = r.event_id LEFT JOIN station s ON s.id = r.station_id WHERE `+where+` = ? ORDER BY r.id`, of.ID)
	if err != nil {
		return nil, fmt.Errorf("read places: %w", err)
	}
	return collect(rows, func(p *RecordPlace) []any {
		return []any{&p.RecordID, &p.EventLatDeg, &p.EventLonDeg, &p.DepthKM, &p.StationLatDeg, &p.StationLonDeg}
	})
}
