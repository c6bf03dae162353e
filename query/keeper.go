package query

import (
	"context"
	"sync"

	"swaybook/db"
)

// keeper stores rows of ordinates of some blocks, many at a time. It is safe for concurrent
// use. What is computed is kept even where the question is stopped.
type keeper struct {
	snapshot *db.Snapshot
	blocks   []*block
	expected int // values of all rows

	mutex    sync.Mutex
	rows     []db.OffGridRow
	values   int  // of the rows
	isOpened bool // its blocks have ids
	isOff    bool // since something could not be stored
}

// keeperValues is how many values wait at most: 8 MB.
const keeperValues = 1 << 20

func (k *keeper) add(ctx context.Context, c *computed) {
	k.mutex.Lock()
	defer k.mutex.Unlock()
	if k.isOff {
		return
	}
	k.rows = append(k.rows, db.OffGridRow{RecordID: c.recordID, Role: c.role, SD: c.sd})
	if k.values += len(c.sd); k.values >= keeperValues {
		k.flush(ctx)
	}
}

// close stores what is left.
func (k *keeper) close(ctx context.Context) {
	k.mutex.Lock()
	defer k.mutex.Unlock()
	k.flush(ctx)
}

// flush is for those who hold the mutex.
func (k *keeper) flush(ctx context.Context) {
	if len(k.rows) == 0 {
		return
	}
	ctx = context.WithoutCancel(ctx)
	if !k.isOpened {
		k.isOpened, k.isOff = true, !k.reserve(ctx)
	}
	if !k.isOff {
		held := make([]db.OffGridBlock, len(k.blocks))
		for i, b := range k.blocks {
			held[i] = b.OffGridBlock
		}
		k.isOff = !k.snapshot.KeepOffGrid(ctx, held, k.rows)
	}
	k.rows, k.values = nil, 0
}

// reserve gives new blocks their ids, and reports whether there is room for all.
func (k *keeper) reserve(ctx context.Context) bool {
	var known []db.OffGridBlock
	var fresh []*block
	var lists [][]db.Oscillator
	for _, b := range k.blocks {
		if b.ID != 0 {
			known = append(known, b.OffGridBlock)
		} else {
			fresh, lists = append(fresh, b), append(lists, b.Oscillators)
		}
	}
	reserved, ok := k.snapshot.ReserveOffGrid(ctx, known, lists, k.expected)
	for i := range reserved {
		fresh[i].ID = reserved[i].ID
	}
	return ok
}
