package db

import (
	"context"
	"fmt"
	"time"
)

// Version is a component that may hold the same motion as another.
type Version struct {
	ComponentID, RecordID int64
	RecordCode            string
	Component             // of which Warnings and HeaderPeak are not read
	Digest                string
	Instrument            string
	Siting                string // "unknown" where nobody says
	// The event, by the one that stands for it, and the station's codes, in capitals; 0
	// and "" where unknown.
	EventID              int64
	Network, StationCode string
	MotionID             int64 // 0 where no other component holds the motion
}

// versionColumns is the query of versions up to its condition: component c, record r, its
// event e and station s, source file f and series x.
func versionColumns(shown tables) string {
	return `SELECT c.id, c.record_id, r.code, r.instrument, r.siting, c.role, c.axis, c.label, c.azimuth_deg, c.channel,
	coalesce(c.start_at, r.start_at, ''), c.step_s, c.samples, c.processing, c.low_cut_hz, c.high_cut_hz,
	f.path, f.sha256, f.format, x.sha256, coalesce(c.motion_id, 0), coalesce(e.primary_id, e.id, 0), coalesce(upper(s.network), ''), coalesce(upper(s.code), '')
	FROM ` + shown("component") + ` c JOIN ` + shown("record") + ` r ON r.id = c.record_id JOIN ` + shown("source_file") + ` f ON f.id = c.source_id
	JOIN series x ON x.id = c.series_id
	LEFT JOIN ` + shown("event") + ` e ON e.id = r.event_id LEFT JOIN ` + shown("station") + ` s ON s.id = r.station_id`
}

// Related returns the records that may hold the same motions as this one, itself
// included: records of one event at a station of the same code, in letters of either case, records with a
// component of equal samples of which events and stations do not say otherwise, and
// those that were found to.
func (t *Tx) Related(ctx context.Context, recordID int64) ([]int64, error) {
	// The cross joins keep the order: from the codes of one event and of one station to
	// the records of both, of which either alone may have thousands.
	rows, err := t.tx.QueryContext(ctx, `WITH this AS (
			SELECT r.id, r.event_id, r.station_id, coalesce(e.primary_id, e.id) AS quake, s.network, s.code
			FROM record r LEFT JOIN event e ON e.id = r.event_id LEFT JOIN station s ON s.id = r.station_id WHERE r.id = ?1)
		SELECT ?1
		UNION SELECT other.id FROM this CROSS JOIN event f ON f.id = this.quake OR f.primary_id = this.quake
			CROSS JOIN station same ON same.code = this.code COLLATE NOCASE AND (same.network = this.network COLLATE NOCASE OR same.network = '' OR this.network = '')
			CROSS JOIN record other ON other.event_id = f.id AND other.station_id = same.id
		UNION SELECT o.record_id FROM this CROSS JOIN component c ON c.record_id = this.id CROSS JOIN component o ON o.series_id = c.series_id CROSS JOIN record r ON r.id = o.record_id
			LEFT JOIN event f ON f.id = r.event_id LEFT JOIN station s ON s.id = r.station_id
			WHERE (f.id IS NULL OR this.quake IS NULL OR coalesce(f.primary_id, f.id) = this.quake)
				AND (s.code IS NULL OR this.code IS NULL OR s.code = this.code COLLATE NOCASE)
		UNION SELECT o.record_id FROM component c JOIN component o ON o.motion_id = c.motion_id WHERE c.record_id = ?1`, recordID)
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	return collect(rows, func(id *int64) []any { return []any{id} })
}

// Relation is one of the things by which Related finds records: the event and the codes
// of a station, samples with the event and the station's code, or a motion.
type Relation struct {
	EventID              int64
	Network, StationCode string
	Digest               string
	MotionID             int64
}

// RelationsOf returns the relations of a record. Another one that has all of them has
// the same related records.
func (t *Tx) RelationsOf(ctx context.Context, recordID int64) ([]Relation, error) {
	rows, err := t.tx.QueryContext(ctx, `WITH this AS (
			SELECT coalesce(e.primary_id, e.id, 0) AS quake, coalesce(upper(s.network), '') AS network, coalesce(upper(s.code), '') AS code
			FROM record r LEFT JOIN event e ON e.id = r.event_id LEFT JOIN station s ON s.id = r.station_id WHERE r.id = ?1)
		SELECT quake, network, code, '', 0 FROM this
		UNION ALL SELECT quake, '', code, x.sha256, 0 FROM this CROSS JOIN component c ON c.record_id = ?1 CROSS JOIN series x ON x.id = c.series_id
		UNION ALL SELECT 0, '', '', '', motion_id FROM component WHERE record_id = ?1 AND motion_id IS NOT NULL`, recordID)
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	return collect(rows, func(r *Relation) []any { return []any{&r.EventID, &r.Network, &r.StationCode, &r.Digest, &r.MotionID} })
}

// VersionsOf returns the components of a record.
func (t *Tx) VersionsOf(ctx context.Context, recordID int64) ([]Version, error) {
	return versions(ctx, t.tx, versionColumns(working(0))+` WHERE c.record_id = ? ORDER BY c.id`, recordID)
}

func versions(ctx context.Context, q queryer, query string, args ...any) ([]Version, error) {
	rows, err := q.QueryContext(ctx, query, args...)
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	type row struct {
		Version
		start string
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.ComponentID, &v.RecordID, &v.RecordCode, &v.Instrument, &v.Siting, &v.Role, &v.Axis, &v.Label, &v.AzimuthDeg, &v.Channel,
			&v.start, &v.StepS, &v.Samples, &v.Processing, &v.LowCutHz, &v.HighCutHz,
			&v.SourcePath, &v.SourceSHA256, &v.SourceFormat, &v.Digest, &v.MotionID, &v.EventID, &v.Network, &v.StationCode}
	})
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	out := make([]Version, len(found))
	for i, v := range found {
		if v.Start, err = parseTime(v.start); err != nil {
			return nil, err
		}
		out[i] = v.Version
	}
	return out, nil
}

// End is the time of the component's last sample, zero where its start is unknown.
func (v *Version) End() time.Time {
	if v.Start.IsZero() {
		return time.Time{}
	}
	return v.Start.Add(time.Duration(float64(v.Samples-1) * v.StepS * float64(time.Second)))
}

// Likeness is how alike the samples of two components are.
type Likeness struct {
	FirstID, SecondID  int64 // of components, the lower one first
	Kind               string
	Scale, Correlation float64
	BandCorrelation    float64 // of what both are between two corners
	LagS               float64 // by which the first begins after the second where they are most alike
}

// LikenessOf returns what is stored of two components; ok is false where nothing is.
func (t *Tx) LikenessOf(ctx context.Context, firstID, secondID int64) (l Likeness, ok bool, err error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT first_id, second_id, kind, scale, correlation, band_correlation, lag_s FROM likeness WHERE first_id = ? AND second_id = ?`,
		min(firstID, secondID), max(firstID, secondID))
	if err != nil {
		return l, false, fmt.Errorf("read likeness: %w", err)
	}
	found, err := collect(rows, func(l *Likeness) []any {
		return []any{&l.FirstID, &l.SecondID, &l.Kind, &l.Scale, &l.Correlation, &l.BandCorrelation, &l.LagS}
	})
	if err != nil || len(found) == 0 {
		return l, false, err
	}
	return found[0], true, nil
}

// PutLikeness stores how alike two components are.
func (t *Tx) PutLikeness(ctx context.Context, l Likeness) error {
	err := t.exec(ctx, `INSERT INTO likeness (first_id, second_id, kind, scale, correlation, band_correlation, lag_s) VALUES (?, ?, ?, ?, ?, ?, ?)`,
		l.FirstID, l.SecondID, l.Kind, l.Scale, l.Correlation, l.BandCorrelation, l.LagS)
	if err != nil {
		return fmt.Errorf("store likeness: %w", err)
	}
	return nil
}

// MotionOf returns a component's motion, as Snapshot.Motion does.
func (t *Tx) MotionOf(ctx context.Context, v *Version) (Motion, error) {
	m, err := readSeries(ctx, t.tx, working(0), `c.id = ?`, v.ComponentID)
	if err != nil {
		return Motion{}, err
	}
	return m.DecodeMotion()
}

// SetMotion stores the least id of the components that hold the same motion, 0 where
// there is no other.
func (t *Tx) SetMotion(ctx context.Context, componentID, motionID int64) error {
	var value any
	if motionID != 0 {
		value = motionID
	}
	_, err := t.changed(ctx, "component", componentID, []assignment{{"motion_id", value}})
	return err
}
