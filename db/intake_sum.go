package db

import (
	"context"
	"fmt"
	"maps"
	"slices"
)

// intakeSum is of how many files intake is, with the sum of their keys' checksums.
type intakeSum struct{ files, keys int64 }

func (s *intakeSum) add(k IntakeKey) {
	s.files++
	s.keys += new(sealer).row(k.Path, int64(k.Member))
}

// intakeSums adds up the table of intake by shard, without an index, which finds what it has.
func intakeSums(ctx context.Context, q queryer) (map[int]intakeSum, error) {
	return sumsByShard(ctx, q, `SELECT shard, count(*), coalesce(sum(crc32c(path, member)), 0) FROM intake NOT INDEXED GROUP BY shard`)
}

// notedSums are those that a store has noted: of the shard that it is, once its last run has come
// to its end, or of those that have been taken over whole.
func notedSums(ctx context.Context, q queryer) (map[int]intakeSum, error) {
	return sumsByShard(ctx, q, `SELECT number, files, keys FROM shard WHERE number > 0 AND (SELECT outcome FROM run ORDER BY id DESC LIMIT 1) = '`+outcomeDone+`'
		UNION ALL SELECT shard, files, keys FROM gathered WHERE is_whole`)
}

func sumsByShard(ctx context.Context, q queryer, query string) (map[int]intakeSum, error) {
	rows, err := q.QueryContext(ctx, query)
	if err != nil {
		return nil, fmt.Errorf("count intake: %w", err)
	}
	type row struct {
		shard int
		intakeSum
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.shard, &v.files, &v.keys} })
	if err != nil {
		return nil, fmt.Errorf("count intake: %w", err)
	}
	out := map[int]intakeSum{}
	for _, v := range found {
		out[v.shard] = v.intakeSum
	}
	return out, nil
}

// noteIntake notes, in a shard, of how many files its intake is.
func (t *Tx) noteIntake(ctx context.Context) error {
	err := t.exec(ctx, `UPDATE shard SET (files, keys) = (SELECT count(*), coalesce(sum(crc32c(i.path, i.member)), 0) FROM intake i NOT INDEXED WHERE i.shard = shard.number) WHERE number > 0`)
	if err != nil {
		return fmt.Errorf("note intake: %w", err)
	}
	return nil
}

// ForgetLostShards returns the shards that a store has taken over, and of which it has not all
// files any more, or others, by number; they count as not taken over. Intake of no shard goes.
func (t *Tx) ForgetLostShards(ctx context.Context) (lost []int, err error) {
	has, err := intakeSums(ctx, t.tx)
	if err != nil {
		return nil, err
	}
	noted, err := notedSums(ctx, t.tx)
	if err != nil {
		return nil, err
	}
	for _, number := range slices.Sorted(maps.Keys(noted)) {
		if has[number] == noted[number] {
			continue
		}
		lost = append(lost, number)
		if err := t.BeginGathering(ctx, number); err != nil {
			return nil, err
		}
	}
	const nobodys = `SELECT id FROM intake WHERE shard NOT IN (SELECT shard FROM gathered)`
	stray, err := t.idOf(ctx, `SELECT EXISTS (`+nobodys+`)`)
	for _, table := range []string{`intake_series WHERE intake_id`, `intake WHERE id`} {
		if err == nil && stray != 0 {
			err = t.exec(ctx, `DELETE FROM `+table+` IN (`+nobodys+`)`)
		}
	}
	if err == nil && (stray != 0 || len(lost) > 0) {
		err = t.noteChange(ctx)
	}
	return lost, err
}
