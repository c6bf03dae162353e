package db

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"strings"
	"time"
)

// Tx is one write transaction.
type Tx struct {
	tx session
}

// Update runs f in one transaction, which is committed if f returns nil and
// rolled back whole otherwise.
func (s *Store) Update(ctx context.Context, f func(*Tx) error) error {
	if s.write == nil {
		return errors.New("store is open for reading only")
	}
	tx, err := s.write.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin transaction: %w", explain(err))
	}
	defer tx.Rollback()
	if err := f(&Tx{tx: newSession(tx)}); err != nil {
		return err
	}
	if err := tx.Commit(); err != nil {
		return fmt.Errorf("commit transaction: %w", err)
	}
	return nil
}

func (t *Tx) exec(ctx context.Context, query string, args ...any) error {
	_, err := t.tx.ExecContext(ctx, query, args...)
	return err
}

func (t *Tx) insert(ctx context.Context, query string, args ...any) (int64, error) {
	r, err := t.tx.ExecContext(ctx, query, args...)
	if err != nil {
		return 0, err
	}
	return r.LastInsertId()
}

// StartRun notes that a run began.
func (t *Tx) StartRun(ctx context.Context, kind, program string, at time.Time) (int64, error) {
	id, err := t.insert(ctx, `INSERT INTO run (kind, program, started_at, outcome) VALUES (?, ?, ?, 'running')`, kind, program, timeText(at))
	if err != nil {
		return 0, fmt.Errorf("start run: %w", err)
	}
	return id, nil
}

// FinishRun notes how a run ended: outcome is "done", "interrupted" or
// "failed", counts is kept as JSON.
func (t *Tx) FinishRun(ctx context.Context, id int64, outcome string, counts any, at time.Time) error {
	text, err := json.Marshal(counts)
	if err != nil {
		return fmt.Errorf("finish run: %w", err)
	}
	err = t.exec(ctx, `UPDATE run SET outcome = ?, counts = ?, ended_at = ? WHERE id = ?`, outcome, string(text), timeText(at), id)
	if err != nil {
		return fmt.Errorf("finish run: %w", err)
	}
	return nil
}

// AddSource stores a file's description. Its content must not be held yet.
func (t *Tx) AddSource(ctx context.Context, src Source, run int64) (int64, error) {
	id, err := t.insert(ctx, `INSERT INTO source_file (sha256, path, size_bytes, modified_at, format, run_id) VALUES (?, ?, ?, ?, ?, ?)`,
		src.SHA256, src.Path, src.Size, timeText(src.Modified), src.Format, run)
	if err != nil {
		return 0, fmt.Errorf("store source %s: %w", src.Path, err)
	}
	return id, nil
}

// Reject stores why a file, or a channel of it, could not be stored.
func (t *Tx) Reject(ctx context.Context, r Rejection, run int64) error {
	err := t.exec(ctx, `INSERT INTO rejection (path, line, cause, sha256, run_id) VALUES (?, ?, ?, ?, ?)
		ON CONFLICT (path, line, cause) DO UPDATE SET sha256 = excluded.sha256, run_id = excluded.run_id`,
		r.Path, r.Line, r.Cause, textOrNull(r.SHA256), run)
	if err != nil {
		return fmt.Errorf("store rejection of %s: %w", r.Path, err)
	}
	return nil
}

// ForgetRejections removes what earlier runs said against the file at path, but
// for what they said of the content with digest keep.
func (t *Tx) ForgetRejections(ctx context.Context, path, keep string) error {
	if err := t.exec(ctx, `DELETE FROM rejection WHERE path = ? AND (sha256 IS NULL OR sha256 <> ?)`, path, keep); err != nil {
		return fmt.Errorf("forget rejections of %s: %w", path, err)
	}
	return nil
}

// RejectionsOf returns what stands against content with this digest: channels
// of a held file that found no place.
func (t *Tx) RejectionsOf(ctx context.Context, path, sha256 string) ([]Rejection, error) {
	return rejections(ctx, t.tx, `WHERE path = ? AND sha256 = ?`, path, sha256)
}

// PutEvent stores the event under its code. Where it is known already, what
// the store lacks is filled in; with override, what e states replaces what is
// stored.
func (t *Tx) PutEvent(ctx context.Context, e Event, override bool) (int64, error) {
	query := upsert("event", []string{"code"}, []string{"name", "origin_time", "latitude_deg", "longitude_deg", "depth_km", "magnitude", "magnitude_type"}, override)
	if override {
		// A magnitude brings its type; without one it is of unknown type.
		query = strings.Replace(query, "coalesce(excluded.magnitude_type, event.magnitude_type)",
			"CASE WHEN excluded.magnitude IS NULL THEN coalesce(excluded.magnitude_type, event.magnitude_type) ELSE excluded.magnitude_type END", 1)
	}
	var id int64
	err := t.tx.QueryRowContext(ctx, query, e.Code, textOrNull(e.Name), timeText(e.Origin), e.LatitudeDeg, e.LongitudeDeg,
		e.DepthKM, e.Magnitude, textOrNull(e.MagnitudeType)).Scan(&id)
	if err != nil {
		return 0, fmt.Errorf("store event %s: %w", e.Code, err)
	}
	return id, nil
}

// PutStation does for a station what PutEvent does for an event.
func (t *Tx) PutStation(ctx context.Context, s Station, override bool) (int64, error) {
	query := upsert("station", []string{"network", "code"}, []string{"name", "latitude_deg", "longitude_deg", "elevation_m", "vs30_m_s"}, override)
	var id int64
	err := t.tx.QueryRowContext(ctx, query, s.Network, s.Code, textOrNull(s.Name), s.LatitudeDeg, s.LongitudeDeg, s.ElevationM, s.Vs30MPS).Scan(&id)
	if err != nil {
		return 0, fmt.Errorf("store station %s: %w", s.Code, err)
	}
	return id, nil
}

// PutRecord stores the record under its code, with its event and station, by
// the same rule as PutEvent. Only override changes the instrument.
func (t *Tx) PutRecord(ctx context.Context, r Record, override bool) (int64, error) {
	eventID, stationID, err := t.putParents(ctx, r, override)
	if err != nil {
		return 0, err
	}
	first, second := "record", "excluded"
	instrument := "record.instrument"
	if override {
		first, second = second, first
		instrument = "CASE WHEN excluded.instrument <> '' THEN excluded.instrument ELSE record.instrument END"
	}
	query := fmt.Sprintf(`INSERT INTO record (code, event_id, station_id, instrument, siting, start_at, distance_km) VALUES (?, ?, ?, ?, ?, ?, ?)
		ON CONFLICT (code) DO UPDATE SET
			event_id = coalesce(%[1]s.event_id, %[2]s.event_id),
			station_id = coalesce(%[1]s.station_id, %[2]s.station_id),
			instrument = %[3]s,
			siting = CASE WHEN %[1]s.siting = 'unknown' THEN %[2]s.siting ELSE %[1]s.siting END,
			start_at = coalesce(record.start_at, excluded.start_at),
			distance_km = coalesce(%[1]s.distance_km, %[2]s.distance_km)
		RETURNING id`, first, second, instrument)
	var id int64
	err = t.tx.QueryRowContext(ctx, query, r.Code, eventID, stationID, r.Instrument, r.Siting, timeText(r.Start), r.DistanceKM).Scan(&id)
	if err != nil {
		return 0, fmt.Errorf("store record %s: %w", r.Code, err)
	}
	return id, nil
}

func (t *Tx) putParents(ctx context.Context, r Record, override bool) (eventID, stationID *int64, err error) {
	if r.Event != nil {
		id, err := t.PutEvent(ctx, *r.Event, override)
		if err != nil {
			return nil, nil, err
		}
		eventID = &id
	}
	if r.Station != nil {
		id, err := t.PutStation(ctx, *r.Station, override)
		if err != nil {
			return nil, nil, err
		}
		stationID = &id
	}
	return eventID, stationID, nil
}

// upsert builds INSERT … ON CONFLICT … RETURNING id for a table whose optional
// columns are filled in, or overridden. Names are constants of this package.
func upsert(table string, key, optional []string, override bool) string {
	var columns, marks, sets string
	for i, c := range append(append([]string{}, key...), optional...) {
		if i > 0 {
			columns += ", "
			marks += ", "
		}
		columns += c
		marks += "?"
	}
	for i, c := range optional {
		first, second := table, "excluded"
		if override {
			first, second = second, first
		}
		if i > 0 {
			sets += ", "
		}
		sets += fmt.Sprintf("%s = coalesce(%s.%s, %s.%s)", c, first, c, second, c)
	}
	conflict := key[0]
	for _, c := range key[1:] {
		conflict += ", " + c
	}
	return fmt.Sprintf("INSERT INTO %s (%s) VALUES (%s) ON CONFLICT (%s) DO UPDATE SET %s RETURNING id", table, columns, marks, conflict, sets)
}

// AddRotated stores what was computed of a record's horizontals over all
// directions. Nothing of that may be stored: see IsUnrotated.
func (t *Tx) AddRotated(ctx context.Context, recordID, generationID int64, rotd50, rotd100 Spectra) error {
	if err := t.addSpectra(ctx, recordID, RoleRotD50, generationID, rotd50); err != nil {
		return err
	}
	return t.addSpectra(ctx, recordID, RoleRotD100, generationID, rotd100)
}

// forgetRotated removes what was computed of both horizontals of a record, in
// every generation, because one of them is no longer what it was.
func (t *Tx) forgetRotated(ctx context.Context, recordID int64) error {
	for _, table := range []string{"spectrum", "measure"} {
		if err := t.exec(ctx, `DELETE FROM `+table+` WHERE record_id = ? AND role IN ('`+RoleRotD50+`', '`+RoleRotD100+`')`, recordID); err != nil {
			return fmt.Errorf("forget rotated %s: %w", table, err)
		}
	}
	return nil
}

// timeText is the store's form of a time, NULL for the zero time.
func timeText(at time.Time) any {
	if at.IsZero() {
		return nil
	}
	return at.UTC().Format(time.RFC3339Nano)
}

func textOrNull(s string) any {
	if s == "" {
		return nil
	}
	return s
}
