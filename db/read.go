package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"sync"
	"time"

	sqlite3 "modernc.org/sqlite/lib"
)

// Snapshot is what a reader sees: one edition, whatever is written meanwhile.
type Snapshot struct {
	tx       queryer
	store    *Store
	shown    tables
	seals    map[sealKey]editionSeal // nil of the working state, which has none
	reserved []OffGridBlock          // by ReserveOffGrid
	// hasVersions says whether components hold one motion, nil before they are read.
	hasVersions *bool

	known    sync.Mutex
	isWhole  map[string]bool            // tables that were looked at
	computed map[string]map[int64]int64 // computations by role and record, of roles that were read

	Edition    Edition
	Generation Generation // the edition's
}

// ErrEmpty says that nothing has been ingested into the store yet.
var ErrEmpty = errors.New("store is empty: ingest record files first")

// ErrUnpublished says that runs have stored something, and none has come to its end.
var ErrUnpublished = errors.New("nothing is published yet: the first run has not ended, or was cut short; run it again")

// View runs f on a snapshot of the published edition. The error is ErrEmpty or
// ErrUnpublished where there is none.
func (s *Store) View(ctx context.Context, f func(*Snapshot) error) error {
	return s.view(ctx, nothingShown, f, isPublished)
}

// absent says why there is no edition such as was asked for.
type absent func(context.Context, queryer) error

// view runs f on a snapshot of the edition that meets the condition. Where there is none,
// the error is that of missing.
func (s *Store) view(ctx context.Context, missing absent, f func(*Snapshot) error, condition string, args ...any) error {
	tx, err := s.read.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin reading: %w", explain(err))
	}
	defer tx.Rollback()
	v, err := snapshotOf(ctx, tx, missing, condition, args...)
	if err == nil {
		v.store = s
		err = v.sealed(ctx)
	}
	if err == nil {
		err = f(v)
	}
	switch {
	case errors.Is(err, ErrAltered):
		return fmt.Errorf("%s: %w", s.path, err)
	case codeOf(err) == sqlite3.SQLITE_CORRUPT:
		return fmt.Errorf("%s: %w: %w; swaybook verify lists all", s.path, ErrAltered, err)
	}
	return err
}

// snapshotOf is a snapshot, without its store, of the edition that meets the condition.
func snapshotOf(ctx context.Context, tx *sql.Tx, missing absent, condition string, args ...any) (*Snapshot, error) {
	e, ok, err := editionBy(ctx, tx, condition, args...)
	if err != nil {
		return nil, err
	}
	if !ok {
		return nil, missing(ctx, tx)
	}
	newest, err := idOf(ctx, tx, `SELECT max(id) FROM edition`)
	if err != nil {
		return nil, fmt.Errorf("read edition: %w", err)
	}
	v := &Snapshot{tx: tx, shown: ofEdition(e.ID, e.ID == newest), Edition: e, isWhole: map[string]bool{}, computed: map[string]map[int64]int64{}}
	v.Generation, err = generation(ctx, tx, e.GenerationID)
	return v, err
}

// nothingShown says why there is nothing to see.
func nothingShown(ctx context.Context, q queryer) error {
	begun, err := idOf(ctx, q, `SELECT coalesce(max(id), 0) FROM component`)
	switch {
	case err != nil:
		return fmt.Errorf("read components: %w", err)
	case begun != 0:
		return ErrUnpublished
	}
	return ErrEmpty
}

func (s *Snapshot) events(ctx context.Context, where string, args []any) (map[int64]*Event, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, code, primary_id, coalesce((SELECT p.code FROM `+s.shown("event")+` p WHERE p.id = e.primary_id), code), coalesce(name, ''),
		coalesce(origin_time, ''), latitude_deg, longitude_deg, depth_km, magnitude, coalesce(magnitude_type, '') FROM `+s.shown("event")+` e`+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read events: %w", err)
	}
	type row struct {
		id      int64
		primary sql.NullInt64
		origin  string
		Event
	}
	seen := s.tally("event", "", "id", "code", "primary_id", "", "name", "origin_time", "latitude_deg", "longitude_deg", "depth_km", "magnitude", "magnitude_type")
	found, err := collectSeen(rows, seen, func(v *row) []any {
		return []any{&v.id, &v.OwnCode, &v.primary, &v.Code, &v.Name, &v.origin, &v.LatitudeDeg, &v.LongitudeDeg, &v.DepthKM, &v.Magnitude, &v.MagnitudeType}
	})
	if err != nil {
		return nil, s.unread("event", err)
	}
	out := make(map[int64]*Event, len(found))
	for _, v := range found {
		if v.Origin, err = parseTime(v.origin); err != nil {
			return nil, err
		}
		out[v.id] = &v.Event
	}
	for _, v := range found {
		if primary := out[v.primary.Int64]; primary != nil { // what was found by a damaged row is not
			out[v.id].Code = primary.OwnCode
		}
	}
	return out, nil
}

func (s *Snapshot) stations(ctx context.Context, where string, args []any) (map[int64]*Station, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, network, code, coalesce(name, ''), latitude_deg, longitude_deg, elevation_m, vs30_m_s, coalesce(site_class, '') FROM `+s.shown("station")+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read stations: %w", err)
	}
	type row struct {
		id int64
		Station
	}
	seen := s.tally("station", "", "id", "network", "code", "name", "latitude_deg", "longitude_deg", "elevation_m", "vs30_m_s", "site_class")
	found, err := collectSeen(rows, seen, func(v *row) []any {
		return []any{&v.id, &v.Network, &v.Code, &v.Name, &v.LatitudeDeg, &v.LongitudeDeg, &v.ElevationM, &v.Vs30MPS, &v.SiteClass}
	})
	if err != nil {
		return nil, s.unread("station", err)
	}
	out := make(map[int64]*Station, len(found))
	for _, v := range found {
		out[v.id] = &v.Station
	}
	return out, nil
}

// Motion returns a component's motion, its samples checked against their digest. The
// error wraps ErrDamaged where these cannot be had.
func (s *Snapshot) Motion(ctx context.Context, componentID int64) (Motion, error) {
	if err := s.wholeOnce(ctx, "component"); err != nil {
		return Motion{}, err
	}
	m, err := readSeries(ctx, s.tx, s.shown, `c.id = ?`, componentID)
	if err != nil {
		return Motion{}, err
	}
	return m.DecodeMotion()
}

// Rejections returns what could not be stored, and what is stored and could not be
// conditioned, ordered by path and line.
func (s *Snapshot) Rejections(ctx context.Context) ([]Rejection, error) {
	if err := s.whole(ctx, "rejection"); err != nil {
		return nil, err
	}
	if s.failures() == 0 {
		return rejections(ctx, s.tx, s.shown, "")
	}
	if err := s.wholeFailures(ctx); err != nil {
		return nil, err
	}
	return rejections(ctx, s.tx, s.shown, "UNION ALL "+failures(s.shown))
}

func rejections(ctx context.Context, q queryer, shown tables, where string, args ...any) ([]Rejection, error) {
	rows, err := q.QueryContext(ctx, `SELECT path, line, cause, coalesce(sha256, '') FROM `+shown("rejection")+` `+where+` ORDER BY path, line, cause`, args...)
	if err != nil {
		return nil, fmt.Errorf("read rejections: %w", explain(err))
	}
	return collect(rows, func(r *Rejection) []any { return []any{&r.Path, &r.Line, &r.Cause, &r.SHA256} })
}

func parseTime(s string) (time.Time, error) {
	if s == "" {
		return time.Time{}, nil
	}
	at, err := time.Parse(time.RFC3339Nano, s)
	if err != nil {
		return at, fmt.Errorf("read time: %w", err)
	}
	return at.UTC(), nil
}
