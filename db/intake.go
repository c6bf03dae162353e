package db

import (
	"context"
	"crypto/sha256"
	"encoding/json"
	"fmt"
)

// IntakeKey is the place of what was read: of the file at path, or of the n-th that came out
// of the archive at path, from 1. Keys sort as files are read.
type IntakeKey struct {
	Path   string
	Member int
}

// BeforeIntake precedes every key.
var BeforeIntake = IntakeKey{Path: "", Member: -1}

// Intake is what a shard's reading made of a file, as its reader wrote it down, with the samples
// of the channels that it gave.
type Intake struct {
	IntakeKey
	Shard  int
	Said   []byte
	Series []IntakeSeries
}

// IntakeSeries are the samples of a channel, from EncodeSamples, by its place in the file. Of
// what is read back by IntakeAfter there is no data.
type IntakeSeries struct {
	Channel, Samples int
	Digest           string
	Data             []byte
}

// CheckIntake says whether all samples are there of which what was said speaks; the error wraps
// ErrDamaged. Who has written it down can tell.
type CheckIntake func(Intake) error

// PutIntake keeps what reading made of a file, in place of what a run before made of it.
func (t *Tx) PutIntake(ctx context.Context, in Intake) error {
	if err := t.ForgetIntake(ctx, in.Shard, in.IntakeKey); err != nil {
		return err
	}
	sum := sha256.Sum256(in.Said)
	id, err := t.insert(ctx, `INSERT INTO intake (shard, path, member, said, sha256) VALUES (?, ?, ?, ?, ?)`,
		in.Shard, in.Path, in.Member, encoder.EncodeAll(in.Said, nil), sum[:])
	if err != nil {
		return fmt.Errorf("store intake of %s: %w", in.Path, err)
	}
	for _, s := range in.Series {
		series, err := t.putSeries(ctx, s.Data, s.Digest)
		if err == nil {
			err = t.exec(ctx, `INSERT INTO intake_series (intake_id, channel, samples, series_id) VALUES (?, ?, ?, ?)`, id, s.Channel, s.Samples, series)
		}
		if err != nil {
			return fmt.Errorf("store intake of %s: %w", in.Path, err)
		}
	}
	return nil
}

// ForgetIntake removes what a shard's reading made of a file.
func (t *Tx) ForgetIntake(ctx context.Context, shard int, key IntakeKey) error {
	err := t.exec(ctx, `DELETE FROM intake_series WHERE intake_id = (SELECT id FROM intake WHERE path = ? AND member = ? AND shard = ?)`, key.Path, key.Member, shard)
	if err == nil {
		err = t.exec(ctx, `DELETE FROM intake WHERE path = ? AND member = ? AND shard = ?`, key.Path, key.Member, shard)
	}
	if err != nil {
		return fmt.Errorf("forget intake of %s: %w", key.Path, err)
	}
	return nil
}

// ClearIntake removes what reading made of all files, and what was seen of them, so that a run
// can read them anew.
func (t *Tx) ClearIntake(ctx context.Context) error {
	for _, table := range []string{"intake_series", "intake", "intake_events", "sighting", "gathered"} {
		if err := t.exec(ctx, `DELETE FROM `+table); err != nil {
			return fmt.Errorf("clear intake: %w", err)
		}
	}
	return nil
}

// PutIntakeEvents keeps what documents said of earthquakes when a shard was read, in place of
// what they said before.
func (t *Tx) PutIntakeEvents(ctx context.Context, shard int, said []byte) error {
	sum := sha256.Sum256(said)
	err := t.exec(ctx, `INSERT OR REPLACE INTO intake_events (shard, said, sha256) VALUES (?, ?, ?)`, shard, encoder.EncodeAll(said, nil), sum[:])
	if err != nil {
		return fmt.Errorf("store events of documents: %w", err)
	}
	return nil
}

// IntakeEvents returns what documents said of earthquakes, once what several shards were told
// alike, as they mostly were.
func (t *Tx) IntakeEvents(ctx context.Context) ([][]byte, error) {
	rows, err := t.tx.QueryContext(ctx, `SELECT said, sha256 FROM intake_events WHERE shard IN (SELECT min(shard) FROM intake_events GROUP BY sha256) ORDER BY shard`)
	if err != nil {
		return nil, fmt.Errorf("read events of documents: %w", err)
	}
	found, err := collect(rows, func(s *sealedSaying) []any { return []any{&s.said, &s.sum} })
	var out [][]byte
	for _, s := range found {
		said, errSaid := s.open()
		if errSaid != nil {
			return nil, fmt.Errorf("read events of documents: %w", errSaid)
		}
		out = append(out, said)
	}
	return out, err
}

// sealedSaying is what was said as it is stored, with its digest.
type sealedSaying struct{ said, sum []byte }

// open returns what was said; the error wraps ErrDamaged where it is something else.
func (s sealedSaying) open() ([]byte, error) {
	text, err := decoder.DecodeAll(s.said, nil)
	if err != nil {
		return nil, fmt.Errorf("%w: %w", ErrDamaged, err)
	}
	if sum := sha256.Sum256(text); string(sum[:]) != string(s.sum) {
		return nil, fmt.Errorf("%w: another digest", ErrDamaged)
	}
	return text, nil
}

// DamagedIntakeError says that what a store keeps of a shard's file is not what was stored.
type DamagedIntakeError struct {
	Shard int
	Key   IntakeKey
	err   error
}

func (e *DamagedIntakeError) Error() string {
	return fmt.Sprintf("intake of %s, of shard %d: %v", e.Key.Path, e.Shard, e.err)
}

func (e *DamagedIntakeError) Unwrap() error { return e.err }

// Damaged is the error of what was lost of it.
func (in Intake) Damaged(err error) error { return &DamagedIntakeError{in.Shard, in.IntakeKey, err} }

// seriesOfIntake is a list, in JSON, of the samples of a row i of intake.
const seriesOfIntake = `(SELECT json_group_array(json_object('Channel', n.channel, 'Samples', n.samples, 'Digest', s.sha256))
	FROM intake_series n JOIN series s ON s.id = n.series_id WHERE n.intake_id = i.id)`

// open takes in what was said and which samples there are, as they are stored.
func (in *Intake) open(s sealedSaying, series []byte) (err error) {
	if in.Said, err = s.open(); err == nil {
		err = json.Unmarshal(series, &in.Series)
	}
	return err
}

// IntakeAfter returns what reading made of files, shard by shard, of so many files behind key,
// in their order, all of a file together. The error is a *DamagedIntakeError where one is damaged.
func (s *Store) IntakeAfter(ctx context.Context, key IntakeKey, files int) ([]Intake, error) {
	rows, err := s.read.QueryContext(ctx, `WITH next AS (SELECT DISTINCT path, member FROM intake WHERE (path, member) > (?, ?) ORDER BY path, member LIMIT ?)
		SELECT i.path, i.member, i.shard, i.said, i.sha256, `+seriesOfIntake+` FROM next n JOIN intake i ON i.path = n.path AND i.member = n.member ORDER BY i.path, i.member, i.shard`, key.Path, key.Member, files)
	if err != nil {
		return nil, fmt.Errorf("read intake: %w", explain(err))
	}
	type row struct {
		Intake
		sealedSaying
		series []byte
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.Path, &v.Member, &v.Shard, &v.said, &v.sum, &v.series} })
	if err != nil {
		return nil, fmt.Errorf("read intake: %w", explain(err))
	}
	out := make([]Intake, len(found))
	for i, v := range found {
		out[i] = v.Intake
		if err := out[i].open(v.sealedSaying, v.series); err != nil {
			return nil, v.Damaged(err)
		}
	}
	return out, nil
}

// CountIntake returns of how many files the store keeps what reading made of them, up to key
// and in all.
func (s *Store) CountIntake(ctx context.Context, key IntakeKey) (upTo, all int, err error) {
	err = s.read.QueryRowContext(ctx, `SELECT count(*) FILTER (WHERE (path, member) <= (?, ?)), count(*) FROM (SELECT DISTINCT path, member FROM intake)`, key.Path, key.Member).Scan(&upTo, &all)
	if err != nil {
		return 0, 0, fmt.Errorf("count intake: %w", explain(err))
	}
	return upTo, all, nil
}
