package db

import (
	"context"
	"database/sql"
	"fmt"
)

// Intake compares what reading made of files, in shards and what is combined of them, with its
// digests.
func (i *Inspection) Intake(ctx context.Context) error {
	type row struct {
		path, sum sql.RawBytes
		shard     int
		said      sql.RawBytes
	}
	opened := func(v *row) error {
		_, err := sealedSaying{v.said, v.sum}.open()
		return err
	}
	err := look(ctx, i, "intake", `SELECT path, shard, said, sha256 FROM intake`, nil, func(v *row) []any { return []any{&v.path, &v.shard, &v.said, &v.sum} }, func(v *row) {
		if opened(v) != nil {
			i.found(Fault{Table: "intake", Text: fmt.Sprintf("shard %d, %s: not what was stored; to combine needs the shard again, or the file", v.shard, v.path)})
		}
	})
	if err != nil {
		return err
	}
	return look(ctx, i, "intake_events", `SELECT shard, said, sha256 FROM intake_events`, nil, func(v *row) []any { return []any{&v.shard, &v.said, &v.sum} }, func(v *row) {
		if opened(v) != nil {
			i.found(Fault{Table: "intake_events", Text: fmt.Sprintf("shard %d: not what was stored; to combine needs the shard again", v.shard)})
		}
	})
}
