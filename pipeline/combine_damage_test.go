package pipeline

import (
	"slices"
	"strings"
	"testing"

	"swaybook/db"
)

// What a store keeps of a shard, and has lost, is found, told, and taken over again, without
// which no combination goes on.
func TestDamagedIntakeIsTakenOverAgain(t *testing.T) {
	opts := options(recordFiles(t, 6))
	shards := shardsOf(t, 2, opts)
	store := newStore(t)
	combined := func(paths ...string) error {
		_, err := combineInto(t.Context(), t, store, paths, opts)
		return err
	}
	if err := combined(shards...); err != nil {
		t.Fatal(err)
	}
	want := dump(t, store)
	published, err := db.Digest(t.Context(), store.Path())
	if err != nil {
		t.Fatal(err)
	}
	execute(t, store.Path(), `UPDATE intake SET said = CAST(said || x'00' AS BLOB) WHERE id = (SELECT max(id) FROM intake WHERE shard = 2)`)
	if v := verify(t, store); len(v.Faults) != 1 || v.Faults[0].Table != "intake" {
		t.Errorf("faults %v, want one of intake", v.Faults)
	}
	execute(t, store.Path(), `UPDATE shard SET state = 'changed'`)
	if err := combined(shards...); err == nil || !strings.Contains(err.Error(), "it is forgotten: combine shard 2 of 2 again") {
		t.Errorf("damaged: %v", err)
	}
	if shown, err := db.Digest(t.Context(), store.Path()); err != nil || shown != published {
		t.Errorf("something else is shown: %v", err)
	}
	if err := combined(shards[0]); err == nil || !strings.Contains(err.Error(), "shard 2 of 2 was being taken over") {
		t.Errorf("without the shard: %v", err)
	}
	if err := combined(shards...); err != nil {
		t.Fatal(err)
	}
	if got := dump(t, store); !slices.Equal(got, want) {
		t.Error("another result")
	}
	if v := verify(t, store); len(v.Faults) != 0 {
		t.Errorf("faults %v", v.Faults)
	}
}
