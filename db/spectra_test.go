package db

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"testing"
)

// TestWalksReadAllOnce: pieces of a walk, wherever they end, are what is read at once, and a row
// that was lost, read or not asked for, is seen in the end.
func TestWalksReadAllOnce(t *testing.T) {
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) (err error) {
		for i := range 9 {
			err = errors.Join(err, add(ctx, tx, g, fmt.Sprint("R", i), RoleH2, float64(i)))
		}
		return err
	})
	read := func(ends ...int64) (ids []int64, sd []float64, err error) {
		err = s.View(t.Context(), func(v *Snapshot) error {
			f := func(id int64, text Ordinates) error {
				one := make([]float64, 2)
				err := text.Decode(one)
				ids, sd = append(ids, id), append(sd, one...)
				return err
			}
			if ends == nil {
				return v.Spectra(t.Context(), RoleH2, 1, Span{1, 3}, f)
			}
			w := v.WalkSpectra(RoleH2, 1, Span{1, 3})
			for _, end := range ends {
				if err := w.To(t.Context(), end, f); err != nil {
					return err
				}
			}
			return w.End(t.Context())
		})
		return ids, sd, err
	}
	ids, sd, err := read()
	if err != nil || len(ids) != 9 {
		t.Fatalf("%d records, %v", len(ids), err)
	}
	for _, ends := range [][]int64{{1, 2, 3, 4, 5, 6, 7, 8, 9}, {4, 4, 3, 9}, {0, 100}, {-5, 7, 12}} {
		if gotIDs, got, err := read(ends...); err != nil || !slices.Equal(gotIDs, ids) || !slices.Equal(got, sd) {
			t.Errorf("to %v: %v, %v, %v, want %v, %v", ends, gotIDs, got, err, ids, sd)
		}
	}
	if gotIDs, _, err := read(2, 5); err != nil || !slices.Equal(gotIDs, ids[:5]) {
		t.Errorf("to 5: %v, %v, want %v", gotIDs, err, ids[:5])
	}
	if _, err := s.write.ExecContext(t.Context(), `DELETE FROM edition_computed WHERE record_id = 7`); err != nil {
		t.Fatal(err)
	}
	for _, ends := range [][]int64{{5}, {6, 9}, {9}} {
		if _, _, err := read(ends...); !errors.Is(err, ErrAltered) {
			t.Errorf("to %v: %v, want a store that was altered", ends, err)
		}
	}
}
