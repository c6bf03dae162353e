package query

import (
	"cmp"
	"context"
	"maps"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/spectrum"
)

// wanted are the oscillators off the grid that are asked for, each once.
type wanted struct {
	oscillators []db.Oscillator
	positions   []int // of each among the ordinates
	at          map[db.Oscillator]int
	twins       map[int]int // positions of those that come again, to that of the first
}

func newWanted(o *ordinates, positions []int) *wanted {
	w := &wanted{at: map[db.Oscillator]int{}, twins: map[int]int{}}
	for _, p := range positions {
		oscillator := db.Oscillator(o.oscillators[p])
		if first, ok := w.at[oscillator]; ok {
			w.twins[p] = w.positions[first]
			continue
		}
		w.at[oscillator] = len(w.oscillators)
		w.oscillators, w.positions = append(w.oscillators, oscillator), append(w.positions, p)
	}
	return w
}

// block is a block of the store, and of each of its oscillators the number among those
// that are wanted, -1 for another.
type block struct {
	db.OffGridBlock
	numbers []int
}

// newBlock reports beside the block whether any of it is wanted.
func (w *wanted) newBlock(of db.OffGridBlock) (b *block, isAny bool) {
	b = &block{of, make([]int, len(of.Oscillators))}
	for i, oscillator := range of.Oscillators {
		k, ok := w.at[oscillator]
		if !ok {
			k = -1
		}
		b.numbers[i], isAny = k, isAny || ok
	}
	return b, isAny
}

// blockOscillators is how many oscillators a block has at most: what is read and written
// costs by the row.
const blockOscillators = 64

// offGrid fills in oscillators off the grid, given by position: kept ones from the store,
// others from samples, and keeps these. Beside what another solver computed nothing is kept.
func (s *source) offGrid(ctx context.Context, o *ordinates, motions []motion, out *unfit, missing []int) error {
	if s.method != defaultMethod || s.snapshot.Generation.Solver != spectrum.Version {
		return s.compute(ctx, o, motions, out, upTo(len(motions)), newTask(o, missing))
	}
	if len(missing) == 0 {
		return nil
	}
	w := newWanted(o, missing)
	held, err := s.snapshot.OffGridBlocks(ctx)
	if err != nil {
		return err
	}
	var known []*block
	for _, h := range held {
		if b, isAny := w.newBlock(h); isAny && len(b.numbers) <= blockOscillators {
			known = append(known, b)
		}
	}
	found, err := s.readKept(ctx, o, motions, w, known)
	if err != nil {
		return err
	}
	for _, l := range found.lacks() {
		blocks := w.cover(l.numbers, known)
		if err := s.computeBlocks(ctx, o, motions, out, w, l.motions, blocks); err != nil {
			return err
		}
		known = append(known, blocks...) // for the next, to which they may be new
	}
	for twin, position := range w.twins {
		copy(o.at(twin), o.at(position))
	}
	return nil
}

// kept notes what was found: of motion i the oscillator of number k in have[i·n + k], a
// bit for each spectrum that the motion is made of.
type kept struct {
	have  []uint8
	n     int
	whole []uint8 // all bits, by motion
}

// readKept fills in what the store has kept of the known blocks.
func (s *source) readKept(ctx context.Context, o *ordinates, motions []motion, w *wanted, known []*block) (*kept, error) {
	found := &kept{n: len(w.oscillators), have: make([]uint8, len(motions)*len(w.oscillators)), whole: make([]uint8, len(motions))}
	for i := range motions {
		found.whole[i] = 1<<motions[i].spectra() - 1
	}
	ids, byID := make([]int64, len(known)), map[int64]*block{}
	for i, b := range known {
		ids[i], byID[b.ID] = b.ID, b
	}
	if len(known) == 0 {
		return found, nil
	}
	parts := partsByRole(motions)
	var values [blockOscillators]float64
	var positions [blockOscillators]int
	for _, role := range slices.Sorted(maps.Keys(parts)) {
		records, byRecord := make([]int64, len(parts[role])), map[int64]*part{}
		for i := range parts[role] {
			p := &parts[role][i]
			records[i], byRecord[p.recordID] = p.recordID, p
		}
		err := s.snapshot.OffGrid(ctx, role, records, ids, func(recordID, blockID int64, sd db.OffGridSD) error {
			b, p := byID[blockID], byRecord[recordID]
			if n := len(b.numbers); sd.Decode(values[:n]) == nil {
				found.note(p, b.numbers, w.positions, positions[:n])
				o.put(p.motion, &motions[p.motion], p.isFirst, positions[:n], values[:n])
			}
			return nil
		})
		if err != nil {
			return nil, err
		}
	}
	return found, nil
}

// note takes down what a row has of a part, and sets into to the positions of what no
// other had, -1 elsewhere.
func (f *kept) note(p *part, numbers, positions, into []int) {
	bit := uint8(2)
	if p.isFirst {
		bit = 1
	}
	have := f.have[p.motion*f.n : (p.motion+1)*f.n]
	for i, k := range numbers {
		into[i] = -1
		if k >= 0 && have[k]&bit == 0 {
			have[k] |= bit
			into[i] = positions[k]
		}
	}
}

// lack is the numbers of oscillators that some motions lack.
type lack struct {
	motions, numbers []int
}

// lacks lists what is not whole, motions that lack the same together.
func (f *kept) lacks() (out []*lack) {
	same := map[string]*lack{}
	bits := make([]byte, (f.n+7)/8)
	for i := range f.whole {
		clear(bits)
		var numbers []int
		for k, have := range f.have[i*f.n : (i+1)*f.n] {
			if have != f.whole[i] {
				bits[k/8] |= 1 << (k % 8)
				numbers = append(numbers, k)
			}
		}
		if len(numbers) == 0 {
			continue
		}
		l, ok := same[string(bits)]
		if !ok {
			l = &lack{numbers: numbers}
			same[string(bits)] = l
			out = append(out, l)
		}
		l.motions = append(l.motions, i)
	}
	return out
}

// cover returns blocks of just these oscillators: known ones as far as they hold no other,
// and new ones, without id.
func (w *wanted) cover(numbers []int, known []*block) (blocks []*block) {
	rest := make(map[int]bool, len(numbers))
	for _, k := range numbers {
		rest[k] = true
	}
	for _, b := range known {
		if slices.ContainsFunc(b.numbers, func(k int) bool { return !rest[k] }) {
			continue
		}
		blocks = append(blocks, b)
		for _, k := range b.numbers {
			delete(rest, k)
		}
	}
	left := slices.SortedFunc(maps.Keys(rest), func(a, b int) int {
		x, y := w.oscillators[a], w.oscillators[b]
		return cmp.Or(cmp.Compare(x.Damping, y.Damping), cmp.Compare(x.PeriodS, y.PeriodS))
	})
	for list := range slices.Chunk(left, blockOscillators) {
		b := &block{numbers: list}
		for _, k := range list {
			b.Oscillators = append(b.Oscillators, w.oscillators[k])
		}
		blocks = append(blocks, b)
	}
	return blocks
}

// spectra is the number of spectra that the motion is made of.
func (m *motion) spectra() int {
	if m.isRotated() {
		return 1
	}
	return len(m.members)
}

// computeBlocks computes the blocks of some motions, and keeps them.
func (s *source) computeBlocks(ctx context.Context, o *ordinates, motions []motion, out *unfit, w *wanted, which []int, blocks []*block) error {
	t := &task{keeper: &keeper{snapshot: s.snapshot, blocks: blocks}}
	for _, b := range blocks {
		for i, k := range b.numbers {
			t.oscillators = append(t.oscillators, spectrum.Oscillator(b.Oscillators[i]))
			t.positions = append(t.positions, w.positions[k])
		}
	}
	for _, i := range which {
		t.keeper.expected += motions[i].spectra() * len(t.oscillators)
	}
	err := s.compute(ctx, o, motions, out, which, t)
	t.keeper.close(ctx)
	return err
}

// part is one spectrum that is wanted, and the motion that it is of.
type part struct {
	recordID int64
	motion   int
	isFirst  bool // of the motion's spectra
}

// partsByRole lists what is wanted of each role, in the order of the records'
// ids.
func partsByRole(motions []motion) map[string][]part {
	out := map[string][]part{}
	for i := range motions {
		isFirst := true
		for s := range motions[i].stored() {
			out[s.Role] = append(out[s.Role], part{recordID: s.RecordID, motion: i, isFirst: isFirst})
			isFirst = false
		}
	}
	for _, parts := range out {
		slices.SortFunc(parts, func(a, b part) int { return cmp.Compare(a.recordID, b.recordID) })
	}
	return out
}
