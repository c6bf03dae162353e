package db

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"fmt"
	"strings"
	"time"
)

// Snapshot is what a reader sees: one state of the store, whatever is written
// meanwhile.
type Snapshot struct {
	tx *sql.Tx
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
	return f(&Snapshot{tx: tx, Generation: g})
}

// HeldComponent is a stored component with all that is known of its record.
type HeldComponent struct {
	ID       int64
	RecordID int64
	Record   Record
	Component
	// PGA, PGV and PGD are the peaks of the ground motion in m/s², m/s and m.
	PGA, PGV, PGD float64
}

// Components returns every held component, ordered by record code and role.
func (s *Snapshot) Components(ctx context.Context) ([]HeldComponent, error) {
	return s.selectComponents(ctx, "")
}

// ComponentsOf returns the components that the file with this digest gave, as
// the transaction sees them.
func (t *Tx) ComponentsOf(ctx context.Context, g Generation, sha256 string) ([]HeldComponent, error) {
	s := Snapshot{tx: t.tx.tx, Generation: g}
	return s.selectComponents(ctx, sha256)
}

// selectComponents reads the components of the file with this digest, of all
// files where it is "". Events and stations are shared by many components and
// read once.
func (s *Snapshot) selectComponents(ctx context.Context, sha256 string) ([]HeldComponent, error) {
	condition, parents := "", ""
	args := []any{s.Generation.ID}
	if sha256 != "" {
		condition = "WHERE f.sha256 = ?2"
		parents = ` WHERE id IN (SELECT r.%s_id FROM record r JOIN component c ON c.record_id = r.id
			JOIN source_file f ON f.id = c.source_id WHERE f.sha256 = ?)`
		args = append(args, sha256)
	}
	events, err := s.events(ctx, strings.ReplaceAll(parents, "%s", "event"), args[1:])
	if err != nil {
		return nil, err
	}
	stations, err := s.stations(ctx, strings.ReplaceAll(parents, "%s", "station"), args[1:])
	if err != nil {
		return nil, err
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT c.id, r.id, r.code, r.event_id, r.station_id, r.instrument, r.siting, coalesce(r.start_at, ''), r.distance_km,
			c.role, c.axis, c.label, c.rank, c.azimuth_deg, c.channel, c.step_s, c.samples, c.unit, c.processing,
			c.low_cut_hz, c.high_cut_hz, c.header_peak_m_s2, c.warnings, c.source_id, c.source_line, f.path, f.sha256, f.format,
			pga.value, pgv.value, pgd.value
		FROM component c
		JOIN record r ON r.id = c.record_id
		JOIN source_file f ON f.id = c.source_id
		LEFT JOIN measure pga ON pga.record_id = r.id AND pga.role = c.role AND pga.generation_id = ?1 AND pga.name = '`+MeasurePGA+`'
		LEFT JOIN measure pgv ON pgv.record_id = r.id AND pgv.role = c.role AND pgv.generation_id = ?1 AND pgv.name = '`+MeasurePGV+`'
		LEFT JOIN measure pgd ON pgd.record_id = r.id AND pgd.role = c.role AND pgd.generation_id = ?1 AND pgd.name = '`+MeasurePGD+`'
		`+condition+` ORDER BY r.code, c.role, c.id`, args...)
	if err != nil {
		return nil, fmt.Errorf("read components: %w", err)
	}
	defer rows.Close()
	var out []HeldComponent
	for rows.Next() {
		c, err := scanComponent(rows, events, stations)
		if err != nil {
			return nil, fmt.Errorf("read components: %w", err)
		}
		out = append(out, c)
	}
	return out, rows.Err()
}

func scanComponent(rows *sql.Rows, events map[int64]*Event, stations map[int64]*Station) (HeldComponent, error) {
	var c HeldComponent
	var event, station sql.NullInt64
	var start, warnings string
	err := rows.Scan(&c.ID, &c.RecordID, &c.Record.Code, &event, &station, &c.Record.Instrument, &c.Record.Siting, &start, &c.Record.DistanceKM,
		&c.Role, &c.Axis, &c.Label, &c.Rank, &c.AzimuthDeg, &c.Channel, &c.StepS, &c.Samples, &c.Unit, &c.Processing,
		&c.LowCutHz, &c.HighCutHz, &c.HeaderPeak, &warnings, &c.SourceID, &c.SourceLine, &c.SourcePath, &c.SourceSHA256, &c.SourceFormat,
		&c.PGA, &c.PGV, &c.PGD)
	if err != nil {
		return c, err
	}
	c.Record.Event = events[event.Int64]
	c.Record.Station = stations[station.Int64]
	if c.Record.Start, err = parseTime(start); err != nil {
		return c, err
	}
	return c, json.Unmarshal([]byte(warnings), &c.Warnings)
}

func (s *Snapshot) events(ctx context.Context, where string, args []any) (map[int64]*Event, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT id, code, coalesce(name, ''), coalesce(origin_time, ''), latitude_deg, longitude_deg, depth_km, magnitude, coalesce(magnitude_type, '') FROM event`+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read events: %w", err)
	}
	type row struct {
		id     int64
		origin string
		Event
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.id, &v.Code, &v.Name, &v.origin, &v.LatitudeDeg, &v.LongitudeDeg, &v.DepthKM, &v.Magnitude, &v.MagnitudeType}
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
	rows, err := s.tx.QueryContext(ctx, `SELECT id, network, code, coalesce(name, ''), latitude_deg, longitude_deg, elevation_m, vs30_m_s FROM station`+where, args...)
	if err != nil {
		return nil, fmt.Errorf("read stations: %w", err)
	}
	type row struct {
		id int64
		Station
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.id, &v.Network, &v.Code, &v.Name, &v.LatitudeDeg, &v.LongitudeDeg, &v.ElevationM, &v.Vs30MPS}
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

// SpectrumKey names one stored spectrum of a damping.
type SpectrumKey struct {
	RecordID int64
	Role     string
}

// Spectra reads the SD spectra, in m, of all records at the grid's damping of
// this position, for the wanted keys only, and calls f with each. sd has one
// value a period of the grid and is reused: f must copy what it keeps.
func (s *Snapshot) Spectra(ctx context.Context, dampingPosition int, wanted map[SpectrumKey]bool, f func(key SpectrumKey, sd []float64) error) error {
	rows, err := s.tx.QueryContext(ctx, `SELECT record_id, role, sd_m FROM spectrum WHERE generation_id = ? AND damping_position = ? ORDER BY role, record_id`,
		s.Generation.ID, dampingPosition)
	if err != nil {
		return fmt.Errorf("read spectra: %w", err)
	}
	defer rows.Close()
	sd := make([]float64, len(s.Generation.Grid.PeriodsS))
	var key SpectrumKey
	var data sql.RawBytes
	for rows.Next() {
		if err := rows.Scan(&key.RecordID, &key.Role, &data); err != nil {
			return fmt.Errorf("read spectra: %w", err)
		}
		if !wanted[key] {
			continue
		}
		if err := decodeOrdinates(sd, data); err != nil {
			return fmt.Errorf("read spectra: record %d %s: %w", key.RecordID, key.Role, err)
		}
		if err := f(key, sd); err != nil {
			return err
		}
	}
	return rows.Err()
}

// Samples returns a component's acceleration in m/s², checked against its
// digest.
func (s *Snapshot) Samples(ctx context.Context, componentID int64) ([]float64, error) {
	var n int
	var digest string
	var data []byte
	err := s.tx.QueryRowContext(ctx, `SELECT c.samples, s.sha256, s.data FROM component c JOIN series s ON s.component_id = c.id WHERE c.id = ?`, componentID).
		Scan(&n, &digest, &data)
	if err != nil {
		return nil, fmt.Errorf("read samples of component %d: %w", componentID, err)
	}
	samples, err := DecodeSamples(data, n, digest)
	if err != nil {
		return nil, fmt.Errorf("component %d: %w", componentID, err)
	}
	return samples, nil
}

// Rejections returns what could not be stored, ordered by path and line.
func (s *Store) Rejections(ctx context.Context) ([]Rejection, error) {
	return rejections(ctx, s.read, "")
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
