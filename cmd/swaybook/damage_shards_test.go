package main

import (
	"bytes"
	"errors"
	"io/fs"
	"math/rand/v2"
	"os"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
)

// compact leaves a store in one file without pages that are free.
func compact(t *testing.T, path string) {
	t.Helper()
	raw := openRaw(t, path)
	defer raw.Close()
	for _, text := range []string{"VACUUM", "PRAGMA wal_checkpoint(TRUNCATE)"} {
		if _, err := raw.ExecContext(t.Context(), text); err != nil {
			t.Fatal(err)
		}
	}
}

// combination is what combine made: its exit code and words, and what the store then shows.
type combination struct {
	code                    int
	words, records, rejects string
	digest                  string
}

func shownCombined(t *testing.T, out string, shards ...string) (c combination) {
	t.Helper()
	var stdout, stderr bytes.Buffer
	c.code = run(t.Context(), append([]string{"swaybook", "--quiet", "combine", out}, shards...), &stdout, &stderr)
	c.words = stderr.String()
	for of, args := range map[*string][]string{
		&c.records: {"query", "records", "--component", "all", "--siting", "all", "--format", "csv"}, &c.rejects: {"query", "records", "--rejected"},
	} {
		stdout.Reset()
		run(t.Context(), append([]string{"swaybook", "--store", out}, args...), &stdout, &stderr)
		*of = stdout.String()
	}
	c.digest, _ = db.Digest(t.Context(), out)
	return c
}

// Of a shard with damage combine tells, or makes what it makes of the whole one. Where what shards
// are combined into is damaged it may make something else, as any run may; verify finds that before.
func TestDamagedShards(t *testing.T) {
	if testing.Short() {
		t.Skip("some minutes")
	}
	_, records := sealedStore(t)
	t.Chdir(t.TempDir())
	shards := []string{"shard-1.db", "shard-2.db"}
	for i, shard := range shards {
		did(t, shard, exitRejected, "ingest", records, "--periods", "0.1,0.5,1", "--dampings", "5%", "--shard", []string{"1/2", "2/2"}[i])
		compact(t, shard)
	}
	want := shownCombined(t, "all.db", shards...)
	if want.code != exitRejected || want.digest == "" {
		t.Fatalf("%+v", want)
	}
	compact(t, "all.db")
	for _, of := range []struct {
		whole, damaged, out string
		parts               []string
	}{
		{shards[1], "damaged.db", "out.db", []string{shards[0], "damaged.db"}},
		{"all.db", "out.db", "out.db", shards},
	} {
		whole, err := os.ReadFile(of.whole)
		if err != nil {
			t.Fatal(err)
		}
		rng := rand.New(rand.NewPCG(19, *damageSeed))
		counts := map[string]int{}
		for range max(1, *damages/4) {
			removeStores(t, of.damaged, of.out)
			data, what := damage(rng, whole)
			if err := os.WriteFile(of.damaged, data, 0o644); err != nil {
				t.Fatal(err)
			}
			found := -1
			if of.damaged == of.out {
				found = faultsOfDamaged(t, of.damaged)
			}
			got := shownCombined(t, of.out, of.parts...)
			switch {
			case got.code == exitFailed && !strings.Contains(got.words, of.damaged):
				t.Errorf("%s of %s: not named: %s", what, of.whole, got.words)
			case got.code == exitFailed:
				counts["refused"]++
			case got.digest == want.digest && got.records == want.records && got.rejects == want.rejects:
				counts["as of the whole one"]++
			case found > 0:
				counts["found by verify"]++
			default:
				t.Errorf("%s of %s: another combination without a word, code %d: %s %s", what, of.whole, got.code, firstDifference(got.records, want.records), got.words)
			}
		}
		t.Logf("%s, %d bytes: %v", of.whole, len(whole), counts)
	}
}

// removeStores removes stores with all that is beside them.
func removeStores(t *testing.T, paths ...string) {
	t.Helper()
	for _, path := range paths {
		for _, end := range []string{"", "-wal", "-shm"} {
			if err := os.Remove(path + end); err != nil && !errors.Is(err, fs.ErrNotExist) {
				t.Fatal(err)
			}
		}
	}
}

// faultsOfDamaged is how many faults verify finds, 1 where it cannot read the store.
func faultsOfDamaged(t *testing.T, path string) int {
	t.Helper()
	v, err := pipeline.Verify(t.Context(), path, pipeline.VerifyOptions{Sample: -1, Clock: time.Now})
	if err != nil {
		return 1
	}
	return len(v.Faults)
}
