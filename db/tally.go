package db

import "slices"

// tally adds up what is read of a table, against its seal. One of a snapshot that has no
// seals, as of the working state, is nil, and finds everything right.
type tally struct {
	edition     int64
	key         sealKey
	want        editionSeal
	keyAt       []int // where the key is among what is read
	at, columns []int // where columns of the table are there, and in the seal
	keys, read  []any
	columnSums
}

// tally is of what columns of this part of a table are read; those that are not the table's own
// do not count.
func (s *Snapshot) tally(name, part string, columns ...string) *tally {
	if s.seals == nil {
		return nil
	}
	t := &tally{edition: s.Edition.ID, key: sealKey{name, part}}
	t.want = s.seals[t.key]
	of := sealedTables[name]
	for _, key := range of.key {
		t.keyAt = append(t.keyAt, slices.Index(columns, key))
	}
	for i, column := range columns {
		if k := slices.Index(of.columns, column); k >= 0 {
			t.at, t.columns = append(t.at, i), append(t.columns, k)
		}
	}
	t.keys, t.read, t.sums = make([]any, len(t.keyAt)), make([]any, len(t.at)), make([]int64, len(t.at))
	return t
}

// add takes a row that was read into variables.
func (t *tally) add(into []any) {
	if t == nil {
		return
	}
	for i, at := range t.keyAt {
		t.keys[i] = into[at]
	}
	for i, at := range t.at {
		t.read[i] = into[at]
	}
	t.columnSums.add(t.keys, t.read)
}

// check says whether all rows of the part were read, as they were stored.
func (t *tally) check() error {
	if t == nil {
		return nil
	}
	was, names := editionSeal{rows: t.want.rows}, []string{}
	for _, column := range t.columns {
		names = append(names, sealedTables[t.key.name].columns[column])
		if column < len(t.want.sums) {
			was.sums = append(was.sums, t.want.sums[column])
		}
	}
	if text := t.key.differs(was, editionSeal{t.rows, t.sums}, names); text != "" && (t.rows != 0 || t.want.rows != 0) {
		return damage(t.edition, t.key.name, text)
	}
	return nil
}
