package db

import (
	"context"
	"database/sql"
	"fmt"
	"maps"
	"slices"
)

// Intake compares what reading made of files, in shards and what is combined of them, with its
// digests, and asks check whether it has its samples.
func (i *Inspection) Intake(ctx context.Context, check CheckIntake) error {
	type row struct {
		shard                   int
		path, said, sum, series sql.RawBytes
	}
	err := look(ctx, i, "intake", `SELECT path, shard, said, sha256, `+seriesOfIntake+` FROM intake i`, nil, func(v *row) []any { return []any{&v.path, &v.shard, &v.said, &v.sum, &v.series} }, func(v *row) {
		var in Intake
		err := in.open(sealedSaying{v.said, v.sum}, v.series)
		if err == nil {
			err = check(in)
		}
		if err != nil {
			i.found(Fault{Table: "intake", Text: fmt.Sprintf("shard %d, %s: not what was stored; to combine needs the shard again, or the file", v.shard, v.path)})
		}
	})
	if err != nil {
		return err
	}
	if err := i.intakeSums(ctx); err != nil {
		return err
	}
	return look(ctx, i, "intake_events", `SELECT shard, said, sha256 FROM intake_events`, nil, func(v *row) []any { return []any{&v.shard, &v.said, &v.sum} }, func(v *row) {
		if _, err := (sealedSaying{v.said, v.sum}).open(); err != nil {
			i.found(Fault{Table: "intake_events", Text: fmt.Sprintf("shard %d: not what was stored; to combine needs the shard again", v.shard)})
		}
	})
}

// intakeSums looks whether intake is of all files of which it was.
func (i *Inspection) intakeSums(ctx context.Context) error {
	has, err := intakeSums(ctx, i.tx)
	var noted map[int]intakeSum
	if err == nil {
		noted, err = notedSums(ctx, i.tx)
	}
	switch {
	case ctx.Err() != nil:
		return ctx.Err()
	case err != nil:
		i.found(Fault{Table: "intake", Text: "cannot be read: " + err.Error()})
		return nil
	}
	for _, number := range slices.Sorted(maps.Keys(noted)) {
		if is, was := has[number], noted[number]; is != was {
			i.found(Fault{Table: "intake", Text: fmt.Sprintf("shard %d: of %d files, and it was of %d, or of others; to combine needs the shard again, or the files", number, is.files, was.files)})
		}
	}
	return i.lookFor(ctx, "intake", `SELECT path || ': of a shard ' || shard || ', which is not there' FROM intake WHERE shard NOT IN (SELECT shard FROM gathered UNION SELECT number FROM shard)`)
}
