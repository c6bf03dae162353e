package query

import (
	"cmp"
	"context"
	"maps"
	"slices"
	"sync"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// block is a block of the store, and the position among the ordinates of each of its
// oscillators, -1 for one that nobody asked for.
type block struct {
	db.OffGridBlock
	positions []int
}

// blockOscillators is how many oscillators a block has at most. What is read and written
// costs by the row; what is computed of records that are new to a block, by all of its
// oscillators.
const blockOscillators = 64

// offGrid fills in oscillators off the grid, given by position: kept ones from the store,
// others from samples, and keeps these.
func (s *source) offGrid(ctx context.Context, o *ordinates, motions []motion, out *unfit, missing []int) error {
	if s.method != defaultMethod {
		return s.compute(ctx, o, motions, out, upTo(len(motions)), newTask(o, missing))
	}
	if len(missing) == 0 {
		return nil
	}
	places, twins := placesOf(o, missing)
	known, fresh, err := s.blocks(ctx, places)
	if err != nil {
		return err
	}
	lacking, err := s.readKept(ctx, o, motions, known)
	if err != nil {
		return err
	}
	if err := s.computeBlocks(ctx, o, motions, out, known, fresh, lacking); err != nil {
		return err
	}
	for twin, position := range twins {
		copy(o.at(twin), o.at(position))
	}
	return nil
}

// placesOf gives the position of each oscillator among those of these positions, and of
// those that come again that of the first.
func placesOf(o *ordinates, positions []int) (places map[db.Oscillator]int, twins map[int]int) {
	places, twins = map[db.Oscillator]int{}, map[int]int{}
	for _, p := range positions {
		oscillator := db.Oscillator(o.oscillators[p])
		if first, ok := places[oscillator]; ok {
			twins[p] = first
		} else {
			places[oscillator] = p
		}
	}
	return places, twins
}

// blocks returns the store's blocks that hold any of the oscillators, and new ones, without
// id, of the others.
func (s *source) blocks(ctx context.Context, places map[db.Oscillator]int) (known, fresh []block, err error) {
	held, err := s.snapshot.OffGridBlocks(ctx)
	if err != nil {
		return nil, nil, err
	}
	rest := maps.Clone(places)
	for _, h := range held {
		if b, isWanted := place(h, rest); isWanted {
			known = append(known, b)
		}
	}
	left := slices.SortedFunc(maps.Keys(rest), func(a, b db.Oscillator) int {
		return cmp.Or(cmp.Compare(a.Damping, b.Damping), cmp.Compare(a.PeriodS, b.PeriodS))
	})
	for list := range slices.Chunk(left, blockOscillators) {
		b, _ := place(db.OffGridBlock{Oscillators: list}, rest)
		fresh = append(fresh, b)
	}
	return known, fresh, nil
}

// place takes the places of the block's oscillators out of the rest.
func place(held db.OffGridBlock, rest map[db.Oscillator]int) (b block, isWanted bool) {
	b = block{held, make([]int, len(held.Oscillators))}
	for i, oscillator := range held.Oscillators {
		b.positions[i] = -1
		if p, ok := rest[oscillator]; ok {
			b.positions[i], isWanted = p, true
			delete(rest, oscillator)
		}
	}
	return b, isWanted
}

// readKept fills in what the store has kept of the blocks, and returns the positions of
// the motions of which it lacks something.
func (s *source) readKept(ctx context.Context, o *ordinates, motions []motion, known []block) (lacking []int, err error) {
	if len(known) == 0 {
		return nil, nil
	}
	ids, byID := make([]int64, len(known)), map[int64]*block{}
	for i := range known {
		ids[i], byID[known[i].ID] = known[i].ID, &known[i]
	}
	isLacking := make([]bool, len(motions))
	parts := partsByRole(motions)
	var values [blockOscillators]float64
	for _, role := range slices.Sorted(maps.Keys(parts)) {
		records, byRecord, found := make([]int64, len(parts[role])), map[int64]*part{}, map[int64]int{}
		for i := range parts[role] {
			p := &parts[role][i]
			records[i], byRecord[p.recordID] = p.recordID, p
		}
		err := s.snapshot.OffGrid(ctx, role, records, ids, func(recordID, blockID int64, sd db.OffGridSD) error {
			b, p := byID[blockID], byRecord[recordID]
			if len(b.positions) <= len(values) && sd.Decode(values[:len(b.positions)]) == nil {
				o.put(p.motion, &motions[p.motion], p.isFirst, b.positions, values[:len(b.positions)])
				found[recordID]++
			}
			return nil
		})
		if err != nil {
			return nil, err
		}
		for id, p := range byRecord {
			isLacking[p.motion] = isLacking[p.motion] || found[id] < len(known)
		}
	}
	for i := range isLacking {
		if isLacking[i] {
			lacking = append(lacking, i)
		}
	}
	return lacking, nil
}

// computeBlocks computes the known blocks of the motions that lack one, the fresh blocks
// of all, and keeps both.
func (s *source) computeBlocks(ctx context.Context, o *ordinates, motions []motion, out *unfit, known, fresh []block, lacking []int) error {
	if len(lacking)+len(fresh) == 0 {
		return nil
	}
	others := slices.DeleteFunc(upTo(len(motions)), func(i int) bool {
		_, isLacking := slices.BinarySearch(lacking, i)
		return isLacking
	})
	both, values := slices.Concat(known, fresh), 0
	for i := range motions {
		values += motions[i].spectra() * oscillatorsOf(fresh)
	}
	for _, i := range lacking {
		values += motions[i].spectra() * oscillatorsOf(known)
	}
	isKept := s.reserve(ctx, both[:len(known)], both[len(known):], values)
	if err := s.computeTask(ctx, o, motions, out, lacking, s.taskOf(both, isKept)); err != nil {
		return err
	}
	return s.computeTask(ctx, o, motions, out, others, s.taskOf(both[len(known):], isKept))
}

// spectra is the number of spectra that the motion is made of.
func (m *motion) spectra() int {
	if m.isRotated() {
		return 1
	}
	return len(m.members)
}

func oscillatorsOf(blocks []block) (n int) {
	for i := range blocks {
		n += len(blocks[i].Oscillators)
	}
	return n
}

// reserve gives the fresh blocks their ids, and reports whether they can be kept.
func (s *source) reserve(ctx context.Context, known, fresh []block, values int) bool {
	held, lists := make([]db.OffGridBlock, len(known)), make([][]db.Oscillator, len(fresh))
	for i := range known {
		held[i] = known[i].OffGridBlock
	}
	for i := range fresh {
		lists[i] = fresh[i].Oscillators
	}
	reserved, ok := s.snapshot.ReserveOffGrid(ctx, held, lists, values)
	for i := range reserved {
		fresh[i].OffGridBlock = reserved[i]
	}
	return ok
}

// taskOf is to compute all oscillators of the blocks, or those that are asked for where
// nothing is kept.
func (s *source) taskOf(blocks []block, isKept bool) *task {
	t := &task{}
	for i := range blocks {
		for k, p := range blocks[i].positions {
			if isKept || p >= 0 {
				t.oscillators = append(t.oscillators, spectrum.Oscillator(blocks[i].Oscillators[k]))
				t.positions = append(t.positions, p)
			}
		}
	}
	if isKept {
		t.keeper = &keeper{snapshot: s.snapshot}
		for i := range blocks {
			t.keeper.blocks = append(t.keeper.blocks, blocks[i].OffGridBlock)
		}
	}
	return t
}

// computeTask keeps what the last motions leave in the keeper's hand, too.
func (s *source) computeTask(ctx context.Context, o *ordinates, motions []motion, out *unfit, which []int, t *task) error {
	if err := s.compute(ctx, o, motions, out, which, t); err != nil {
		return err
	}
	if t.keeper != nil {
		t.keeper.mutex.Lock()
		defer t.keeper.mutex.Unlock()
		t.keeper.flush(ctx)
	}
	return ctx.Err()
}

// keeper stores rows of ordinates, many at a time. It is safe for concurrent use.
type keeper struct {
	snapshot *db.Snapshot
	blocks   []db.OffGridBlock
	mutex    sync.Mutex
	rows     []db.OffGridRow
	values   int
	isOff    bool // after the first that could not be stored
}

// keeperValues is how many values wait at most: 8 MB.
const keeperValues = 1 << 20

func (k *keeper) add(ctx context.Context, c *computed) {
	k.mutex.Lock()
	defer k.mutex.Unlock()
	if k.isOff {
		return
	}
	k.rows = append(k.rows, db.OffGridRow{RecordID: c.recordID, Role: c.role, Blocks: k.blocks, SD: c.sd})
	if k.values += len(c.sd); k.values >= keeperValues {
		k.flush(ctx)
	}
}

// flush is for those who hold the mutex.
func (k *keeper) flush(ctx context.Context) {
	if len(k.rows) > 0 {
		k.isOff = !k.snapshot.KeepOffGrid(ctx, k.rows)
	}
	k.rows, k.values = nil, 0
}
