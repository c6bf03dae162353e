package db

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"fmt"
	"time"
)

// Tx is one write transaction.
type Tx struct {
	tx    session
	begun tileBegun
	// hasEditions says that editions have come or changed, to be laid out; made is that which came, 0 for none.
	hasEditions bool
	made        int64
}

var errReading = errors.New("store is open for reading only")

// Update runs f in one transaction, which is committed if f returns nil and
// rolled back whole otherwise.
func (s *Store) Update(ctx context.Context, f func(*Tx) error) error {
	if s.write == nil {
		return errReading
	}
	err := transact(ctx, s.write, f)
	if codeOf(err) != 0 || errors.Is(err, ErrAltered) {
		err = fmt.Errorf("write to store %s: %w", s.path, err)
	}
	return err
}

// finish does what is left to the end, since more of it may come until then.
func (t *Tx) finish(ctx context.Context) error {
	if err := t.writeTile(ctx); err != nil || !t.hasEditions {
		return err
	}
	if err := t.layOut(ctx); err != nil { // tiles tell where spectra are
		return err
	}
	return t.dropTiles(ctx) // of which no columns tell any more
}

func transact(ctx context.Context, write *sql.DB, f func(*Tx) error) (err error) {
	defer func() { err = explain(err) }()
	tx, err := write.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin transaction: %w", err)
	}
	defer tx.Rollback()
	t := &Tx{tx: newSession(tx)}
	if err := f(t); err != nil {
		return err
	}
	if err := t.finish(ctx); err != nil {
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
// "failed", counts is kept as JSON. The edition that it made is kept with it, or the
// published one.
func (t *Tx) FinishRun(ctx context.Context, id int64, outcome string, counts any, at time.Time) error {
	text, err := json.Marshal(counts)
	if err != nil {
		return fmt.Errorf("finish run: %w", err)
	}
	err = t.exec(ctx, `UPDATE run SET outcome = ?1, counts = ?2, ended_at = ?3, edition_id = coalesce(
		(SELECT id FROM edition WHERE id = ?4), (SELECT id FROM edition WHERE state = '`+EditionPublished+`')) WHERE id = ?4`,
		outcome, string(text), timeText(at), id)
	if err == nil && outcome == outcomeDone {
		err = t.noteIntake(ctx)
	}
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

// Reject stores why a file, or a channel of it, could not be stored. What the newest edition
// has of it keeps its number, so that a run which rejects again what was rejected changes
// nothing.
func (t *Tx) Reject(ctx context.Context, r Rejection, run int64) error {
	err := t.exec(ctx, fmt.Sprintf(`INSERT INTO rejection (id, path, line, cause, sha256, run_id) VALUES (
		(SELECT e.id FROM edition_rejection e WHERE e.path = ?1 AND e.line = ?2 AND e.cause = ?3 AND e.until = %d AND NOT EXISTS (SELECT 1 FROM rejection r WHERE r.id = e.id)),
		?1, ?2, ?3, ?4, ?5)
		ON CONFLICT (path, line, cause) DO UPDATE SET sha256 = excluded.sha256, run_id = excluded.run_id`, open),
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

// ForgetUnread removes what earlier runs said against the archive at path, and
// against whatever in it had no content that could be read: all that the next
// reading says again where it still holds. The paths of what is in it begin with
// below.
func (t *Tx) ForgetUnread(ctx context.Context, path, below string) error {
	err := t.exec(ctx, `DELETE FROM rejection WHERE path = ? OR (sha256 IS NULL AND path > ? AND path < ? || char(0x10FFFF))`, path, below, below)
	if err != nil {
		return fmt.Errorf("forget rejections in %s: %w", path, err)
	}
	return nil
}

// RejectionsOf returns what stands against content with this digest: channels
// of a held file that found no place.
func (t *Tx) RejectionsOf(ctx context.Context, path, sha256 string) ([]Rejection, error) {
	return rejections(ctx, t.tx, working(0), `WHERE path = ? AND sha256 = ?`, path, sha256)
}

// PutEvent returns the event of this code, which is stored as e where there is
// none. What is taken of several who speak of it is for SetEvent to say.
func (t *Tx) PutEvent(ctx context.Context, e Event) (int64, error) {
	id, err := t.put(ctx, `INSERT INTO event (code, name, origin_time, latitude_deg, longitude_deg, depth_km, magnitude, magnitude_type)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (code) DO UPDATE SET code = code RETURNING id`,
		e.Code, textOrNull(e.Name), timeText(e.Origin), e.LatitudeDeg, e.LongitudeDeg, e.DepthKM, e.Magnitude, textOrNull(e.MagnitudeType))
	if err != nil {
		return 0, fmt.Errorf("store event %s: %w", e.Code, err)
	}
	return id, nil
}

// PutStation does for a station what PutEvent does for an event.
func (t *Tx) PutStation(ctx context.Context, s Station) (int64, error) {
	id, err := t.put(ctx, `INSERT INTO station (network, code, name, latitude_deg, longitude_deg, elevation_m, vs30_m_s, site_class)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (network, code) DO UPDATE SET code = code RETURNING id`,
		s.Network, s.Code, textOrNull(s.Name), s.LatitudeDeg, s.LongitudeDeg, s.ElevationM, s.Vs30MPS, textOrNull(s.SiteClass))
	if err != nil {
		return 0, fmt.Errorf("store station %s: %w", s.Code, err)
	}
	return id, nil
}

// put runs a statement that returns an id.
func (t *Tx) put(ctx context.Context, query string, args ...any) (id int64, err error) {
	return id, t.tx.QueryRowContext(ctx, query, args...).Scan(&id)
}

// PutRecord stores the record under its code, with its event and station. Where
// it is known already, what the store lacks is filled in; with override, what r
// states replaces what is stored.
func (t *Tx) PutRecord(ctx context.Context, r Record, override bool) (RecordKey, error) {
	eventID, stationID, err := t.putParents(ctx, r)
	if err != nil {
		return RecordKey{}, err
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
			start_at = coalesce(record.start_at, excluded.start_at)
		RETURNING id, coalesce(event_id, 0), coalesce(station_id, 0)`, first, second, instrument)
	var k RecordKey
	err = t.tx.QueryRowContext(ctx, query, r.Code, eventID, stationID, r.Instrument, r.Siting, timeText(r.Start), r.Distances.BestKM).
		Scan(&k.ID, &k.EventID, &k.StationID)
	if err != nil {
		return RecordKey{}, fmt.Errorf("store record %s: %w", r.Code, err)
	}
	return k, nil
}

// RecordKey is a record's identity in the store, with its event's and station's;
// 0 where it has none.
type RecordKey struct{ ID, EventID, StationID int64 }

func (t *Tx) putParents(ctx context.Context, r Record) (eventID, stationID *int64, err error) {
	if r.Event != nil {
		id, err := t.PutEvent(ctx, *r.Event)
		if err != nil {
			return nil, nil, err
		}
		eventID = &id
	}
	if r.Station != nil {
		id, err := t.PutStation(ctx, *r.Station)
		if err != nil {
			return nil, nil, err
		}
		stationID = &id
	}
	return eventID, stationID, nil
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
