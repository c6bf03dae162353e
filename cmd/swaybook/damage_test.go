package main

import (
	"bytes"
	"database/sql"
	"flag"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime/debug"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
	"swaybook/pipeline/demo"
)

var damages = flag.Int("damages", 200, "random bytes of a store that TestDamage damages")

// damagedStore ingests some invented records into a small store.
func damagedStore(t *testing.T) (path string) {
	t.Helper()
	dir := t.TempDir()
	if _, err := demo.Write(filepath.Join(dir, "records"), demo.Options{Events: 2, Stations: 2, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	path = filepath.Join(dir, "store.db")
	var stderr bytes.Buffer
	catalogue := filepath.Join(dir, "records", "catalogue.csv")
	for _, args := range [][]string{
		{"ingest", filepath.Join(dir, "records"), "--catalogue", catalogue, "--periods", "0.1,0.2,0.5,1,2", "--dampings", "2%,5%"},
		{"query", "spectrum", "--periods", "0.3,0.7", "--damping", "5%"}, // which are kept
	} {
		if code := run(t.Context(), append([]string{"swaybook", "--quiet", "--store", path}, args...), io.Discard, &stderr); code != exitDone {
			t.Fatalf("%v: %d: %s", args, code, &stderr)
		}
	}
	// Pages that migrations have freed would be most of so small a file.
	raw, err := sql.Open("sqlite", "file:"+path)
	if err != nil {
		t.Fatal(err)
	}
	defer raw.Close()
	for _, text := range []string{"VACUUM", "PRAGMA wal_checkpoint(TRUNCATE)"} {
		if _, err := raw.ExecContext(t.Context(), text); err != nil {
			t.Fatal(err)
		}
	}
	return path
}

// answers asks all kinds of questions. An answer is the whole of stdout, or "" where it
// failed with a message.
func answers(t *testing.T, path string) (out []string) {
	t.Helper()
	for _, args := range [][]string{
		{"query", "spectrum", "--damping", "5%", "--format", "json"},
		{"query", "spectrum", "--damping", "5%", "--component", "rotd100", "--periods", "0.3,0.7,1"},
		{"query", "demand", "--period", "0.5s", "--damping", "2%", "--weight", "100kN", "--height", "4m", "--component", "h1"},
		{"query", "records", "--format", "json"},
		{"query", "records", "--rejected"},
		{"query", "records", "--conflicts"},
		{"export", "ordinates"},
	} {
		var stdout, stderr bytes.Buffer
		code := run(t.Context(), append([]string{"swaybook", "--store", path}, args...), &stdout, &stderr)
		if code != exitDone {
			if stderr.Len() == 0 {
				t.Errorf("%v failed without a word", args)
			}
			stdout.Reset()
		}
		out = append(out, stdout.String()+"\x00"+stderr.String())
	}
	return out
}

type verdict struct {
	faults         int
	err            error
	digest         string
	wrong, failed  int // answers: other without a word, or none
	changed        bool
	panicked, what string
}

// judge damages a copy of a store at one byte and asks it everything.
func judge(t *testing.T, whole []byte, want []string, wantDigest string, at int, value byte) (v verdict) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "damaged.db")
	data := bytes.Clone(whole)
	data[at] ^= value
	if err := os.WriteFile(path, data, 0o644); err != nil {
		t.Fatal(err)
	}
	defer func() {
		if cause := recover(); cause != nil {
			v.panicked = fmt.Sprint(cause, "\n", string(debug.Stack()))
		}
	}()
	found, err := pipeline.Verify(t.Context(), path, pipeline.VerifyOptions{Sample: -1, Clock: time.Now})
	v.faults, v.err = len(found.Faults), err
	if len(found.Faults) > 0 {
		v.what = found.Faults[0].String()
	}
	v.digest, _ = db.Digest(t.Context(), path)
	v.changed = v.digest != wantDigest
	for i, got := range answers(t, path) {
		a, message, _ := strings.Cut(got, "\x00")
		b, _, _ := strings.Cut(want[i], "\x00")
		switch {
		case a == b:
		case a == "":
			v.failed++
		case strings.Contains(got, db.ErrDamaged.Error()):
			v.failed++ // in part, and says so
		default:
			v.changed = true
			v.wrong++
			if v.wrong == 1 {
				v.what += fmt.Sprintf(" [answer %d: %q %s]", i, firstDifference(a, b), message)
			}
		}
	}
	return v
}

func firstDifference(a, b string) string {
	x, y := strings.Split(a, "\n"), strings.Split(b, "\n")
	for i := range min(len(x), len(y)) {
		if x[i] != y[i] {
			return x[i] + " | " + y[i]
		}
	}
	return "length"
}

// Of a store with one damaged byte verify finds the damage, or nobody can tell that there is
// any; what has a checksum gives no wrong answer, and nothing panics.
func TestDamage(t *testing.T) {
	if testing.Short() {
		t.Skip("some minutes")
	}
	path := damagedStore(t)
	want := answers(t, path)
	wantDigest, err := db.Digest(t.Context(), path)
	if err != nil {
		t.Fatal(err)
	}
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%d bytes", len(whole))
	rng := rand.New(rand.NewPCG(17, 4))
	counts := map[string]int{}
	for range *damages {
		at, value := rng.IntN(len(whole)), byte(1+rng.IntN(255))
		v := judge(t, whole, want, wantDigest, at, value)
		name := "unseen and harmless"
		switch {
		case v.panicked != "":
			t.Errorf("byte %d ^ %#x: panic: %s", at, value, v.panicked)
		case v.faults > 0 || v.err != nil:
			name = "found"
		case v.changed || v.failed > 0:
			name = "missed"
			t.Errorf("byte %d ^ %#x: missed by verify, and answers changed: %s", at, value, v.what)
		}
		if v.wrong > 0 {
			counts["wrong answers"]++ // of measures and metadata, which have no checksum
			for _, table := range []string{"spectrum ", "series ", "off_grid"} {
				if strings.HasPrefix(v.what, table) {
					t.Errorf("byte %d ^ %#x: answered by what is damaged", at, value)
				}
			}
			t.Logf("byte %d ^ %#x: wrong: %s", at, value, v.what)
		}
		if v.failed > 0 {
			counts["answers refused"]++
		}
		counts[name]++
	}
	t.Log(counts)
}
