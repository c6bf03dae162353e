package pipeline

import (
	"context"
	"errors"
	"fmt"

	"swaybook/db"
)

// checkTaken says of which shards the store has lost files, now or since they were taken over.
func (c *combining) checkTaken(ctx context.Context) error {
	var lost []int
	err := c.store.Update(ctx, func(tx *db.Tx) (err error) {
		lost, err = tx.ForgetLostShards(ctx)
		return err
	})
	if err == nil && len(lost) > 0 {
		err = fmt.Errorf("%w: it has not the files of shards %v of %d that it took over: combine these again", db.ErrDamaged, lost, c.count())
	}
	return err
}

// forget removes what is damaged, so that the next run takes it over again, and none goes on
// without.
func (c *combining) forget(ctx context.Context, damaged *db.DamagedIntakeError) error {
	err := c.store.Update(ctx, func(tx *db.Tx) error {
		return errors.Join(
			tx.ForgetIntake(ctx, damaged.Shard, damaged.Key), tx.BeginGathering(ctx, damaged.Shard),
			tx.SetRebuild(ctx, db.Rebuild{State: db.RebuildChanged, Reached: db.BeforeIntake}))
	})
	if err != nil {
		return errors.Join(damaged, err)
	}
	for _, p := range c.parts {
		if p.Number != damaged.Shard {
			continue
		}
		if err := p.Check(ctx, damaged.Key, checkIntake); err != nil { // it came so
			return err
		}
	}
	return fmt.Errorf("%w; it is forgotten: combine shard %d of %d again", damaged, damaged.Shard, c.count())
}
