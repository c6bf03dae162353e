package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"maps"
	"slices"
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
	// isLaidOut says that the edition's columns can be read; see layOut.
	isLaidOut bool
	// hasVersions says whether components hold one motion, nil before they are read.
	hasVersions *bool

	known    sync.Mutex
	isWhole  map[string]bool            // tables that were looked at
	computed map[string]map[int64]int64 // computations by role and record, of roles that were read
	places   map[string][]location      // of spectra by role, of roles that were read

	Edition    Edition
	Generation Generation // the edition's
}

// ofRows is the snapshot without what is laid out of its edition.
func (s *Snapshot) ofRows() *Snapshot {
	v := newSnapshot(s.tx, s.Edition, s.shown)
	v.store, v.seals, v.Generation = s.store, s.seals, s.Generation
	return v
}

func newSnapshot(tx queryer, e Edition, shown tables) *Snapshot {
	return &Snapshot{tx: tx, shown: shown, Edition: e, isWhole: map[string]bool{}, computed: map[string]map[int64]int64{}, places: map[string][]location{}}
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
	v := newSnapshot(tx, e, ofEdition(e.ID, e.ID == newest))
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
	type row struct {
		id      int64
		primary sql.NullInt64
		origin  string
		Event
	}
	var v row
	primaries, out := map[int64]int64{}, map[int64]*Event{}
	err := s.scan(ctx, wanted{
		name: "event", columns: words(`id code primary_id name origin_time latitude_deg longitude_deg depth_km magnitude magnitude_type`), condition: where, args: args,
		into: []any{&v.id, &v.OwnCode, &v.primary, &v.Name, &v.origin, &v.LatitudeDeg, &v.LongitudeDeg, &v.DepthKM, &v.Magnitude, &v.MagnitudeType},
	}, func() (err error) {
		e := v.Event
		e.Code = e.OwnCode
		if v.primary.Valid {
			primaries[v.id] = v.primary.Int64
		}
		out[v.id] = &e
		e.Origin, err = parseTime(v.origin)
		return err
	})
	if err != nil {
		return nil, err
	}
	if where != "" {
		return out, s.primaryCodes(ctx, out, primaries)
	}
	for id, primary := range primaries {
		if p := out[primary]; p != nil {
			out[id].Code = p.OwnCode
		}
	}
	return out, nil
}

// primaryCodes gives events, of which not all were read, the codes of those for which they stand.
func (s *Snapshot) primaryCodes(ctx context.Context, events map[int64]*Event, primaries map[int64]int64) error {
	var id int64
	var code string
	codes := map[int64]string{}
	err := s.scan(ctx, wanted{
		name: "event", columns: words(`id code`), into: []any{&id, &code},
		condition: ` WHERE id IN (SELECT value FROM json_each(?))`, args: []any{idList(slices.Collect(maps.Values(primaries)))},
	}, func() error {
		codes[id] = code
		return nil
	})
	for id, primary := range primaries {
		if code, isThere := codes[primary]; isThere {
			events[id].Code = code
		}
	}
	return err
}

func (s *Snapshot) stations(ctx context.Context, where string, args []any) (map[int64]*Station, error) {
	var id int64
	var v Station
	out := map[int64]*Station{}
	err := s.scan(ctx, wanted{
		name: "station", columns: words(`id network code name latitude_deg longitude_deg elevation_m vs30_m_s site_class`), condition: where, args: args,
		into: []any{&id, &v.Network, &v.Code, &v.Name, &v.LatitudeDeg, &v.LongitudeDeg, &v.ElevationM, &v.Vs30MPS, &v.SiteClass},
	}, func() error {
		out[id] = new(v)
		return nil
	})
	return out, err
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
