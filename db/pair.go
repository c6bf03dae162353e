package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"time"
)

// Pair is a record's two horizontals, h1 and h2.
type Pair struct {
	RecordID      int64
	Code          string // the record's
	First, Second PairComponent
}

// PairComponent is what decides of a component whether it makes a pair.
type PairComponent struct {
	ID           int64
	StepS        float64
	Samples      int
	AzimuthDeg   float64 // where known
	AzimuthKnown bool
	Start        time.Time // UTC; zero where unknown
}

// Unrotated returns the pairs of the generation's records that lack what is
// computed over all directions, in the order in which the records were stored.
func (s *Store) Unrotated(ctx context.Context, generationID int64) ([]Pair, error) {
	return unrotated(ctx, s.read, generationID, 0, "")
}

// IsUnrotated reports whether the record still holds this very pair, and lacks
// what is computed of it over all directions.
func (t *Tx) IsUnrotated(ctx context.Context, generationID int64, p Pair) (bool, error) {
	found, err := unrotated(ctx, t.tx, generationID, t.begun.id, "AND r.id = ?", p.RecordID)
	return len(found) == 1 && found[0] == p, err
}

// unrotated looks for what is computed of each pair, and whether its spectra are there, or in the
// tile that is begun: what was lost is computed again.
func unrotated(ctx context.Context, q queryer, generationID, begun int64, condition string, args ...any) ([]Pair, error) {
	rows, err := q.QueryContext(ctx, `SELECT r.id, r.code,
			a.id, a.step_s, a.samples, coalesce(a.azimuth_deg, 0), a.azimuth_deg IS NOT NULL, coalesce(a.start_at, ''),
			b.id, b.step_s, b.samples, coalesce(b.azimuth_deg, 0), b.azimuth_deg IS NOT NULL, coalesce(b.start_at, '')
		FROM record r
		CROSS JOIN component a ON a.record_id = r.id AND a.role = '`+RoleH1+`'
		CROSS JOIN component b ON b.record_id = r.id AND b.role = '`+RoleH2+`'
		WHERE (SELECT count(*) FROM computed k WHERE k.generation_id = ? AND k.role IN ('`+RoleRotD50+`', '`+RoleRotD100+`') AND k.record_id = r.id AND `+hasSpectra+`) < 2 `+condition+`
		ORDER BY r.id`, append([]any{generationID, begun}, args...)...)
	if err != nil {
		return nil, fmt.Errorf("find unrotated pairs: %w", err)
	}
	type row struct {
		Pair
		first, second string // starts
	}
	found, err := collect(rows, func(v *row) []any {
		a, b := &v.First, &v.Second
		return []any{&v.RecordID, &v.Code, &a.ID, &a.StepS, &a.Samples, &a.AzimuthDeg, &a.AzimuthKnown, &v.first, &b.ID, &b.StepS, &b.Samples, &b.AzimuthDeg, &b.AzimuthKnown, &v.second}
	})
	if err != nil {
		return nil, fmt.Errorf("find unrotated pairs: %w", err)
	}
	pairs := make([]Pair, len(found))
	for i, v := range found {
		if v.First.Start, err = parseTime(v.first); err != nil {
			return nil, err
		}
		if v.Second.Start, err = parseTime(v.second); err != nil {
			return nil, err
		}
		pairs[i] = v.Pair
	}
	return pairs, nil
}

// StoredMotion is what the store holds of a component, still encoded.
type StoredMotion struct {
	role              string
	samples           int
	digest            string
	data              []byte // nil where there is none
	stepS             float64
	state             string
	lowCutHz          sql.NullFloat64
	highCutHz         sql.NullFloat64
	sd                [][]byte // by damping
	periods, dampings int
}

// ReadPair reads what is stored of a pair's components in one generation.
func (s *Store) ReadPair(ctx context.Context, g Generation, p Pair) (first, second StoredMotion, err error) {
	tx, err := s.read.BeginTx(ctx, nil)
	if err != nil {
		return first, second, fmt.Errorf("begin reading: %w", explain(err))
	}
	defer tx.Rollback()
	tiles := &tileReader{q: tx}
	if first, err = readMotion(ctx, tiles, g, p.First.ID); err == nil {
		second, err = readMotion(ctx, tiles, g, p.Second.ID)
	}
	if err != nil {
		return first, second, fmt.Errorf("read pair of record %s: %w", p.Code, err)
	}
	return first, second, nil
}

// readSeries reads the samples of one component and what goes with them.
func readSeries(ctx context.Context, q queryer, shown tables, condition string, args ...any) (m StoredMotion, err error) {
	err = q.QueryRowContext(ctx, `SELECT c.role, c.samples, coalesce(s.sha256, ''), s.data, c.step_s, c.processing, c.low_cut_hz, c.high_cut_hz
		FROM `+shown("component")+` c LEFT JOIN series s ON s.id = c.series_id WHERE `+condition, args...).
		Scan(&m.role, &m.samples, &m.digest, &m.data, &m.stepS, &m.state, &m.lowCutHz, &m.highCutHz)
	if err != nil {
		return m, fmt.Errorf("read samples: %w", err)
	}
	return m, nil
}

func readMotion(ctx context.Context, tiles *tileReader, g Generation, componentID int64) (StoredMotion, error) {
	m, err := readSeries(ctx, tiles.q, working(g.ID), `c.id = ?`, componentID)
	if err != nil {
		return m, err
	}
	m.periods, m.dampings = len(g.Grid.PeriodsS), len(g.Grid.Dampings)
	computation, err := idOf(ctx, tiles.q, `SELECT k.computation_id FROM component c JOIN computed k ON k.record_id = c.record_id AND k.role = c.role AND k.generation_id = ?
		WHERE c.id = ?`, g.ID, componentID)
	if err == nil && computation != 0 {
		m.sd, err = tiles.whole(ctx, computation)
	}
	return m, err
}

// DecodeMotion returns the motion as it was delivered, its samples checked against their
// digest. The error wraps ErrDamaged and says what is.
func (m StoredMotion) DecodeMotion() (Motion, error) {
	samples, err := DecodeSamples(m.data, m.samples, m.digest)
	if err != nil {
		return Motion{}, m.damaged(err)
	}
	return Motion{Acceleration: samples, StepS: m.stepS, State: m.state, LowCutHz: orNaN(m.lowCutHz), HighCutHz: orNaN(m.highCutHz)}, nil
}

// ErrUnsolved says that a component's spectra have not been computed in a generation.
var ErrUnsolved = errors.New("spectra not computed")

// DecodeSD returns the SD in m, the grid's dampings outside and its periods inside: the
// doubles that were stored. The error wraps ErrUnsolved where there are none, else
// ErrDamaged, and says what is.
func (m StoredMotion) DecodeSD() ([]float64, error) {
	if len(m.sd) == 0 {
		return nil, fmt.Errorf("%s: %w", m.role, ErrUnsolved)
	}
	if len(m.sd) != m.dampings {
		return nil, m.damaged(fmt.Errorf("spectra of %d dampings, want %d", len(m.sd), m.dampings))
	}
	sd := make([]float64, len(m.sd)*m.periods)
	for i, stored := range m.sd {
		if stored == nil {
			return nil, m.damaged(fmt.Errorf("spectrum: %w", errSealed))
		}
		if err := Ordinates(stored).Decode(sd[i*m.periods : (i+1)*m.periods]); err != nil {
			return nil, m.damaged(err)
		}
	}
	return sd, nil
}

func (m StoredMotion) damaged(err error) error {
	return fmt.Errorf("%w: %s: %w", ErrDamaged, m.role, err)
}
