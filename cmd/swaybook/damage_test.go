package main

import (
	"bytes"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime/debug"
	"strings"
	"testing"
	"time"

	"swaybook/db"
	"swaybook/pipeline"
)

var (
	damages    = flag.Int("damages", 100, "places of a store that TestDamage damages at random")
	damageSeed = flag.Uint64("damage-seed", 4, "which places those are")
)

// damagedStore is a sealedStore in which something is kept off the grid.
func damagedStore(t *testing.T) (path string) {
	t.Helper()
	path, _ = sealedStore(t)
	did(t, path, exitDone, "query", "spectrum", "--periods", "0.3,0.7", "--damping", "5%")
	compact(t, path) // pages that migrations have freed would be most of so small a file
	return path
}

// damage changes a copy of a file: as a rule a byte, now and then a sector that is read as
// zeros, or a page in whose place another one was written.
func damage(rng *rand.Rand, whole []byte) (data []byte, what string) {
	const sector, page = 512, 4096
	data = bytes.Clone(whole)
	switch rng.IntN(10) {
	case 0:
		at := sector * rng.IntN(len(data)/sector)
		clear(data[at : at+sector])
		return data, fmt.Sprintf("sector at %d", at)
	case 1:
		from, to := page*rng.IntN(len(data)/page), page*rng.IntN(len(data)/page)
		copy(data[to:to+page], whole[from:from+page])
		return data, fmt.Sprintf("page at %d instead of that at %d", from, to)
	}
	at, value := rng.IntN(len(whole)), byte(1+rng.IntN(255))
	data[at] ^= value
	return data, fmt.Sprintf("byte %d ^ %#x", at, value)
}

// answers asks all kinds of questions. An answer is the whole of stdout, or "" where it failed
// with a message.
func answers(t *testing.T, path string) (out []string) {
	t.Helper()
	for _, args := range append([][]string{
		{"query", "spectrum", "--damping", "5%", "--component", "rotd100", "--periods", "0.3,0.7,1"},
		{"query", "demand", "--period", "0.5s", "--damping", "5%", "--weight", "100kN", "--height", "4m", "--component", "h1"},
	}, sealedQuestions...) {
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

// judge asks a damaged copy of a store everything.
func judge(t *testing.T, data []byte, want []string, wantDigest string) (v verdict) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "damaged.db")
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
		case strings.Contains(a+message, db.ErrDamaged.Error()):
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

// Of a store with damage verify finds it, or nobody can tell that there is any; no question
// gives another answer without saying so, and nothing panics.
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
	rng := rand.New(rand.NewPCG(17, *damageSeed))
	counts := map[string]int{}
	for range *damages {
		data, what := damage(rng, whole)
		v := judge(t, data, want, wantDigest)
		name := "unseen and harmless"
		switch {
		case v.panicked != "":
			t.Errorf("%s: panic: %s", what, v.panicked)
		case v.faults > 0 || v.err != nil:
			name = "found"
		case v.changed || v.failed > 0:
			name = "missed"
			t.Errorf("%s: missed by verify, and answers changed: %s", what, v.what)
		}
		if v.wrong > 0 {
			counts["wrong answers"]++
			t.Errorf("%s: answered otherwise without a word: %s", what, v.what)
		}
		if v.failed > 0 {
			counts["answers refused"]++
		}
		counts[name]++
	}
	t.Log(counts)
}
