package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"time"
)

// Snapshot is what a reader sees: one state of the store, whatever is written
// meanwhile.
type Snapshot struct {
	tx       *sql.Tx
	store    *Store
	reserved []OffGridBlock // by ReserveOffGrid
	// Generation is the published one.
	Generation Generation
}

// ErrEmpty says that nothing has been ingested into the store yet.
var ErrEmpty = errors.New("store is empty: ingest record files first")

// View runs f on a snapshot. The error is ErrEmpty where nothing is published.
func (s *Store) View(ctx context.Context, f func(*Snapshot) error) error {
	tx, err := s.read.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin reading: %w", explain(err))
	}
	defer tx.Rollback()
	g, ok, err := published(ctx, tx)
	if err != nil {
		return fmt.Errorf("read generation: %w", err)
	}
	if !ok {
		return ErrEmpty
	}
	return f(&Snapshot{tx: tx, store: s, Generation: g})
}

func (s *Snapshot) events(ctx context.Context, where string, args []any) (map[int64]*Event, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, code, coalesce((SELECT p.code FROM event p WHERE p.id = event.primary_id), code), coalesce(name, ''),
		coalesce(origin_time, ''), latitude_deg, longitude_deg, depth_km, magnitude, coalesce(magnitude_type, '') FROM event`+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read events: %w", err)
	}
	type row struct {
		id     int64
		origin string
		Event
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.id, &v.OwnCode, &v.Code, &v.Name, &v.origin, &v.LatitudeDeg, &v.LongitudeDeg, &v.DepthKM, &v.Magnitude, &v.MagnitudeType}
	})
	if err != nil {
		return nil, fmt.Errorf("read events: %w", err)
	}
	out := make(map[int64]*Event, len(found))
	for _, v := range found {
		if v.Origin, err = parseTime(v.origin); err != nil {
			return nil, err
		}
		out[v.id] = &v.Event
	}
	return out, nil
}

func (s *Snapshot) stations(ctx context.Context, where string, args []any) (map[int64]*Station, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, network, code, coalesce(name, ''), latitude_deg, longitude_deg, elevation_m, vs30_m_s, coalesce(site_class, '') FROM station`+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read stations: %w", err)
	}
	type row struct {
		id int64
		Station
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.id, &v.Network, &v.Code, &v.Name, &v.LatitudeDeg, &v.LongitudeDeg, &v.ElevationM, &v.Vs30MPS, &v.SiteClass}
	})
	if err != nil {
		return nil, fmt.Errorf("read stations: %w", err)
	}
	out := make(map[int64]*Station, len(found))
	for _, v := range found {
		out[v.id] = &v.Station
	}
	return out, nil
}

// Span is the positions From … To-1 of the grid's periods.
type Span struct{ From, To int }

// Spectra reads the SD spectra of a role at the grid's damping of this position,
// at the periods of the span only, and calls f with each in the order of the
// record's id. Each text holds one value a period, unless it is damaged. f must
// not keep it.
func (s *Snapshot) Spectra(ctx context.Context, role string, dampingPosition int, periods Span, f func(recordID int64, sd Ordinates) error) error {
	what, args := "s.sd_m", []any{s.Generation.ID, dampingPosition, role}
	if periods != (Span{0, len(s.Generation.Grid.PeriodsS)}) {
		what = "substr(s.sd_m, ?4, ?5)"
		args = append(args, periods.From*OrdinateWidth+1, (periods.To-periods.From)*OrdinateWidth)
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, `+what+` FROM computed k CROSS JOIN spectrum s ON s.id = `+firstSpectrum+` + ?2
		WHERE k.generation_id = ?1 AND k.role = ?3 ORDER BY k.record_id`, args...)
	if err != nil {
		return fmt.Errorf("read spectra: %w", err)
	}
	defer rows.Close()
	var id int64
	var text sql.RawBytes
	for rows.Next() {
		if err := rows.Scan(&id, &text); err != nil {
			return fmt.Errorf("read spectra: %w", err)
		}
		if err := f(id, Ordinates(text)); err != nil {
			return err
		}
	}
	return rows.Err()
}

// RotatedPeaks returns the peaks that are stored under a role of RotD, by the
// record's id: those of the records whose spectra of that role are stored.
func (s *Snapshot) RotatedPeaks(ctx context.Context, role string) (map[int64]Peaks, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, m.name, m.value FROM computed k
		CROSS JOIN measure m ON m.computation_id = k.computation_id WHERE k.generation_id = ? AND k.role = ?`, s.Generation.ID, role)
	if err != nil {
		return nil, fmt.Errorf("read rotated peaks: %w", err)
	}
	type row struct {
		id    int64
		name  string
		value float64
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.id, &v.name, &v.value} })
	if err != nil {
		return nil, fmt.Errorf("read rotated peaks: %w", err)
	}
	out := map[int64]Peaks{}
	for _, v := range found {
		p, ok := out[v.id]
		if !ok {
			p = lostPeaks
		}
		switch v.name {
		case MeasurePGA:
			p.PGA = v.value
		case MeasurePGV:
			p.PGV = v.value
		case MeasurePGD:
			p.PGD = v.value
		}
		out[v.id] = p
	}
	return out, nil
}

// Motion returns a component's motion, its samples checked against their digest. The
// error wraps ErrDamaged where these cannot be had.
func (s *Snapshot) Motion(ctx context.Context, recordID int64, role string) (Motion, error) {
	m, err := readSeries(ctx, s.tx, `c.record_id = ? AND c.role = ?`, recordID, role)
	if err != nil {
		return Motion{}, err
	}
	return m.DecodeMotion()
}

// Rejections returns what could not be stored, and what is stored and could not be
// conditioned by the published recipe, ordered by path and line.
func (s *Store) Rejections(ctx context.Context) ([]Rejection, error) {
	return rejections(ctx, s.read, "UNION ALL "+failures)
}

func rejections(ctx context.Context, q queryer, where string, args ...any) ([]Rejection, error) {
	rows, err := q.QueryContext(ctx, `SELECT path, line, cause, coalesce(sha256, '') FROM rejection `+where+` ORDER BY path, line, cause`, args...)
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
