package pipeline

import (
	"context"
	"crypto/sha256"
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"path"
	"time"

	"swaybook/db"
	"swaybook/ingest"
)

// share is which part of the records a run takes; the zero value takes all.
type share db.Shard

// takes reports whether what has this key is of the share. A key is of one share of so many,
// whatever else there is.
func (s share) takes(key string) bool {
	if s.Count == 0 {
		return true
	}
	sum := sha256.Sum256([]byte(key))
	return binary.BigEndian.Uint64(sum[:])%uint64(s.Count) == uint64(s.Number-1)
}

// recordKey is what the channels of a record have in common by what is said of them alone,
// so that every run can tell without the store. Of one without an earthquake it is the
// station, since channels start seconds apart, and which earthquake it was others may say
// tomorrow. Files without identity go by what their names, or folders, have in common.
func recordKey(c *ingest.Channel, rel, stem string) string {
	station := ingest.StationCode(c)
	switch {
	case station != "" && isWithoutEvent(c):
		return station
	case station != "":
		return station + " " + ingest.EventCode(c)
	}
	base, o := ingest.SplitStem(stem)
	if base == stem && o.Axis != ingest.AxisUnknown {
		base = ""
	}
	return path.Join(folderOf(rel), base)
}

// claim makes a store that is new that of a shard, and refuses one that is of another, or of
// none where there should be one.
func claim(ctx context.Context, tx *db.Tx, shard db.Shard) error {
	held, _, err := tx.Shard(ctx)
	if err != nil || held == shard {
		return err
	}
	isUsed, err := tx.IsUsed(ctx)
	switch {
	case err != nil:
		return err
	case held.Count == 0 && !isUsed:
		return tx.SetShard(ctx, shard)
	case held.Count == 0:
		return fmt.Errorf("the store holds records already, but not as %s: move it away, or name a new store", shard)
	case shard.Count > 0:
		return fmt.Errorf("the store is %s, not %s: each part of an archive needs a store of its own", held, shard)
	case held.IsCombined():
		return fmt.Errorf("the store is %s: ingest into these and combine them again, or name another store with --store", held)
	}
	return fmt.Errorf("the store is %s: say --shard %d/%d, or name another store with --store", held, held.Number, held.Count)
}

// CheckParts says what keeps parts from being combined, for a study or, as the zero value, for
// none, into whatever store.
func CheckParts(ctx context.Context, parts []*db.Part, opts Options, study Study) error {
	return newCombining(parts, study).fit(ctx, opts)
}

// claimForStudy does so for a study, whose store may come back from shards that were combined
// to the files themselves; isOther says that it does, and that they have to be read.
func claimForStudy(ctx context.Context, tx *db.Tx, shard db.Shard) (isOther bool, err error) {
	held, ok, err := tx.Shard(ctx)
	if err == nil && ok && held.IsCombined() && shard.Count == 0 {
		return true, tx.SetShard(ctx, shard)
	}
	if err == nil && held.Count > 0 && shard.Count == 0 {
		return false, fmt.Errorf("the store is %s: the study needs one of its own, name another in it", held)
	}
	return false, errors.Join(err, claim(ctx, tx, shard))
}

// saidEvents are what documents said of earthquakes, as it is kept for stores to be combined.
type saidEvents struct {
	Events    []ingest.CatalogueEvent
	Withdrawn map[string]time.Time
}

// keepEvents keeps what documents say of earthquakes, in a shard, beside what those of former
// runs said.
func keepEvents(ctx context.Context, tx *db.Tx, opts Options) error {
	if opts.Shard.Count == 0 {
		return nil
	}
	kept, err := eventsOf(ctx, tx)
	if err != nil {
		return err
	}
	kept.Tell(opts.Hints.Metadata.Events())
	for id, at := range opts.Hints.Metadata.Withdrawn() {
		kept.Withdraw(id, at)
	}
	said, err := json.Marshal(saidEvents{kept.Events(), kept.Withdrawn()})
	if err != nil {
		return fmt.Errorf("write down events: %w", err)
	}
	return tx.PutIntakeEvents(ctx, opts.Shard.Number, said)
}

// eventsOf are the events that documents said of when shards were read.
func eventsOf(ctx context.Context, tx *db.Tx) (*ingest.Metadata, error) {
	kept, err := tx.IntakeEvents(ctx)
	if err != nil {
		return nil, err
	}
	m := &ingest.Metadata{}
	for _, text := range kept {
		var said saidEvents
		if err := json.Unmarshal(text, &said); err != nil {
			return nil, fmt.Errorf("read events: %w", err)
		}
		m.Tell(said.Events)
		for id, at := range said.Withdrawn {
			m.Withdraw(id, at)
		}
	}
	return m, nil
}
