package pipeline

import (
	"testing"

	"swaybook/db"
)

// A run that stores nothing makes no edition, though it rejects again what was rejected; one
// that somebody has published stays so.
func TestARunThatChangesNothingMakesNoEdition(t *testing.T) {
	dir, store := recordFiles(t, 1), newStore(t)
	put(t, dir, "bad.AT2", "This is none.\n")
	put(t, dir, "worse.AT2", "Nor is this.\n")
	edition := func() (newest, published db.Edition) {
		err := store.Update(t.Context(), func(tx *db.Tx) (err error) {
			if newest, _, err = tx.NewestEdition(t.Context()); err == nil {
				published, _, err = tx.PublishedEdition(t.Context())
			}
			return err
		})
		if err != nil {
			t.Fatal(err)
		}
		return newest, published
	}
	run(t, store, options(dir))
	first, _ := edition()
	put(t, dir, "EV9_ST09000.AT2", at2("Invented", "Site 09", "000", 9))
	run(t, store, options(dir))
	second, _ := edition()
	if err := store.Update(t.Context(), func(tx *db.Tx) error { return tx.Publish(t.Context(), first.ID) }); err != nil {
		t.Fatal(err)
	}
	if s := run(t, store, options(dir)); s.Rejected < 2 || s.Stored != 0 {
		t.Fatalf("the last run: %+v", s)
	}
	if newest, published := edition(); newest.ID != second.ID || published.ID != first.ID || first.ID == second.ID {
		t.Errorf("the newest edition is %d, want %d, and %d is published, want %d", newest.ID, second.ID, published.ID, first.ID)
	}
}
