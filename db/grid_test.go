package db

import (
	"errors"
	"testing"
)

// No run computes by a recipe or a grid that is not what was stored, or takes it for a new one.
func TestDamagedGenerationsAreRefused(t *testing.T) {
	for _, damage := range []string{
		`UPDATE recipe SET steps = '["another"]'`,
		`UPDATE grid_period SET period_s = 7 WHERE position = 1`,
		`DELETE FROM grid_period`,
		`UPDATE grid_damping SET position = 9 - position`,
	} {
		s, g := filledStore(t)
		current := func() (got Generation) {
			err := s.Update(t.Context(), func(tx *Tx) (err error) {
				got, _, err = tx.Current(t.Context())
				return err
			})
			if errors.Is(err, ErrAltered) {
				return Generation{}
			}
			if err != nil {
				t.Fatal(err)
			}
			return got
		}
		if got := current(); got.Recipe != g.Recipe || !got.Grid.Equal(g.Grid) {
			t.Fatalf("%+v, want %+v", got, g)
		}
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(damage, err)
		}
		if got := current(); got.ID != 0 {
			t.Errorf("%s: %+v", damage, got)
		}
	}
}
