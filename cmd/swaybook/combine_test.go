package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"swaybook/db"
	"swaybook/pipeline/demo"
)

// shardedArchive writes invented records and the fixtures of all formats, archives and
// documents among them, with copies under other names, and returns what ingest is told of
// them.
func shardedArchive(t *testing.T) []string {
	t.Helper()
	records := filepath.Join(t.TempDir(), "records")
	if _, err := demo.Write(records, demo.Options{Events: 3, Stations: 4, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	for _, copied := range []struct{ to, from string }{
		{"fixtures", filepath.Join("..", "..", "testdata", "records")}, {"again", filepath.Join(records, "q3-knet")},
	} {
		if err := os.CopyFS(filepath.Join(records, copied.to), os.DirFS(copied.from)); err != nil {
			t.Fatal(err)
		}
	}
	return []string{"ingest", records, "--catalogue", filepath.Join(records, "catalogue.csv"), "--periods", "0.1,0.5,1", "--dampings", "0,5%"}
}

// ingestShards ingests an archive in so many parts, each into a store in dir.
func ingestShards(t *testing.T, dir string, n int, ingest []string) (stores []string) {
	t.Helper()
	for i := range n {
		store := filepath.Join(dir, fmt.Sprintf("%d-of-%d.db", i+1, n))
		code := runQuietly(t.Context(), store, append(ingest, "--shard", fmt.Sprintf("%d/%d", i+1, n))...)
		if code != exitDone && code != exitRejected {
			t.Fatalf("shard %d of %d: exit code %d", i+1, n, code)
		}
		stores = append(stores, store)
	}
	return stores
}

// runQuietly runs a command on a store and returns its exit code.
func runQuietly(ctx context.Context, store string, args ...string) int {
	return run(ctx, append([]string{"swaybook", "--quiet", "--store", store}, args...), io.Discard, io.Discard)
}

// combines combines shards, which must end so; where that is to be done, some files may have
// been rejected.
func combines(t *testing.T, code int, out string, shards ...string) (stdout string) {
	t.Helper()
	var text, stderr bytes.Buffer
	if got := run(t.Context(), append([]string{"swaybook", "--quiet", "combine", out}, shards...), &text, &stderr); got != code && (code != exitDone || got != exitRejected) {
		t.Fatalf("combine: exit code %d, want %d: %s", got, code, &stderr)
	}
	return text.String() + stderr.String()
}

func digestOfStore(t *testing.T, store string) string {
	t.Helper()
	digest, err := db.Digest(t.Context(), store)
	if err != nil {
		t.Fatal(err)
	}
	return digest
}

// TestCombinedIsAsIngestedAtOnce holds that shards make what one run makes, however many
// there are and in whatever order they come, at once or one after the other.
func TestCombinedIsAsIngestedAtOnce(t *testing.T) {
	dir, ingest := t.TempDir(), shardedArchive(t)
	whole := filepath.Join(dir, "whole.db")
	did(t, whole, exitRejected, ingest...)
	want := digestOfStore(t, whole)
	rejected := printed(t, whole, "query", "records", "--rejected")
	list := printed(t, whole, "query", "records", "--siting", "all", "--component", "all", "--format", "json")
	for _, n := range []int{1, 3, 4} {
		shards := ingestShards(t, dir, n, ingest)
		for i, order := range orders(shards) {
			out := filepath.Join(dir, fmt.Sprintf("out-%d-%d.db", n, i))
			for _, part := range order {
				combines(t, exitDone, out, part...)
			}
			if got := digestOfStore(t, out); got != want {
				t.Errorf("%d shards, order %d: digest %s, want %s", n, i, got, want)
			}
			if got := printed(t, out, "query", "records", "--rejected"); got != rejected {
				t.Errorf("%d shards, order %d: rejected\n%s\nwant\n%s", n, i, got, rejected)
			}
			if got := printed(t, out, "query", "records", "--siting", "all", "--component", "all", "--format", "json"); got != list {
				t.Errorf("%d shards, order %d: other records, or codes", n, i)
			}
			if i == 0 {
				did(t, out, exitDone, "verify", "--all")
			}
		}
	}
}

// orders are ways in which shards may come: call by call.
func orders(shards []string) [][][]string {
	n := len(shards)
	backwards := make([]string, n)
	for i, s := range shards {
		backwards[n-1-i] = s
	}
	oneByOne := make([][]string, n)
	for i := range backwards {
		oneByOne[i] = backwards[i : i+1]
	}
	return [][][]string{{shards}, {backwards}, oneByOne, {shards, shards[n-1:]}}
}

func printed(t *testing.T, store string, args ...string) string {
	t.Helper()
	var stdout, stderr bytes.Buffer
	if code := run(t.Context(), append([]string{"swaybook", "--quiet", "--store", store}, args...), &stdout, &stderr); code != exitDone {
		t.Fatalf("%v: exit code %d: %s", args, code, &stderr)
	}
	return stdout.String()
}

// TestShardsKeepRecordsTogether holds that no record is in two shards, and that a file that
// is added moves no record.
func TestShardsKeepRecordsTogether(t *testing.T) {
	dir := t.TempDir()
	records := filepath.Join(dir, "records")
	if _, err := demo.Write(records, demo.Options{Events: 4, Stations: 6, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	ingest := []string{"ingest", records, "--periods", "1", "--dampings", "5%", "--rotation=false"}
	shardOf := map[string]int{}
	look := func() {
		for i, store := range ingestShards(t, dir, 3, ingest) {
			for _, line := range strings.Split(strings.TrimSpace(printed(t, store, "export", "ordinates")), "\n")[1:] {
				code, _, _ := strings.Cut(line, ",")
				if in, ok := shardOf[code]; ok && in != i {
					t.Errorf("record %s is in shards %d and %d", code, in+1, i+1)
				}
				shardOf[code] = i
			}
		}
	}
	look()
	if len(shardOf) < 4*6 {
		t.Fatalf("%d records in the shards, want 24 at least", len(shardOf))
	}
	if _, err := demo.Write(filepath.Join(records, "more"), demo.Options{Events: 6, Stations: 6, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	look()
	if len(shardOf) < 6*6 {
		t.Fatalf("%d records in the shards, want 36 at least", len(shardOf))
	}
}

// TestCombineFollowsShards holds that what shards have new, changed or no more is so in what
// they are combined into.
func TestCombineFollowsShards(t *testing.T) {
	dir := t.TempDir()
	records := filepath.Join(dir, "records")
	if _, err := demo.Write(records, demo.Options{Events: 2, Stations: 3, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	ingest := []string{"ingest", records, "--periods", "0.5,1", "--dampings", "5%"}
	out := filepath.Join(dir, "out.db")
	same := func(name string, shards []string) {
		t.Helper()
		whole := filepath.Join(dir, name)
		if code := runQuietly(t.Context(), whole, ingest...); code != exitDone && code != exitRejected {
			t.Fatalf("exit code %d", code)
		}
		if got, want := digestOfStore(t, out), digestOfStore(t, whole); got != want {
			t.Errorf("%s: digest %s, want %s", name, got, want)
		}
	}
	shards := ingestShards(t, dir, 2, ingest)
	combines(t, exitDone, out, shards...)
	same("first.db", shards)
	if _, err := demo.Write(filepath.Join(records, "a-few-more"), demo.Options{Events: 4, Stations: 3, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	ingestShards(t, dir, 2, ingest)
	combines(t, exitDone, out, shards...)
	same("added.db", shards)
	ingest = append(ingest, "--catalogue", filepath.Join(records, "catalogue.csv"))
	ingestShards(t, dir, 2, ingest)
	combines(t, exitDone, out, shards...)
	same("described.db", shards)
	if err := os.RemoveAll(filepath.Join(records, "q2-cosmos")); err != nil {
		t.Fatal(err)
	}
	for _, s := range shards {
		if err := os.Remove(s); err != nil {
			t.Fatal(err)
		}
	}
	ingestShards(t, dir, 2, ingest)
	combines(t, exitDone, out, shards...)
	same("removed.db", shards)
	shards = ingestShards(t, dir, 3, ingest)
	combines(t, exitDone, out, shards...)
	same("split.db", shards)
	if text := combines(t, exitDone, out, shards...); !strings.Contains(text, "Nothing is new") {
		t.Errorf("combined again: %s", text)
	}
}

// TestCombineSaysWhatIsNew holds that a combination says of which edition questions are
// answered, also where other results have made it of the same files.
func TestCombineSaysWhatIsNew(t *testing.T) {
	dir := t.TempDir()
	records := filepath.Join(dir, "records")
	if _, err := demo.Write(records, demo.Options{Events: 1, Stations: 3, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	ingest := []string{"ingest", records, "--periods", "1", "--dampings", "5%"}
	out, shards := filepath.Join(dir, "out.db"), ingestShards(t, dir, 2, ingest)
	for _, c := range []struct {
		name, want       string
		change           func()
		isRebuilt, isNew bool
	}{
		{"first", "Edition 1 is published.", func() {}, true, true},
		{"again", "Nothing is new: edition 1 is that of the shards.", func() {}, false, false},
		{"another recipe", "is published, before it was 1.", func() {
			for i, shard := range shards {
				if code := runQuietly(t.Context(), shard, "ingest", "--recipe", "as-delivered", "--shard", fmt.Sprintf("%d/2", i+1)); code != exitDone {
					t.Fatalf("exit code %d", code)
				}
			}
		}, false, true},
		{"again", "Nothing is new: edition", func() {}, false, false},
	} {
		c.change()
		as := filepath.Join(dir, "as-json.db")
		if data, err := os.ReadFile(out); err == nil {
			if err := os.WriteFile(as, data, 0o666); err != nil {
				t.Fatal(err)
			}
		}
		if text := combines(t, exitDone, out, shards...); !strings.Contains(text, c.want) {
			t.Errorf("%s: %q does not say %q", c.name, text, c.want)
		}
		var got struct {
			IsRebuilt bool `json:"is_rebuilt"`
			IsNew     bool `json:"is_new_edition"`
		}
		text := combines(t, exitDone, as, append(shards, "--json")...)
		if err := json.Unmarshal([]byte(text), &got); err != nil || got.IsRebuilt != c.isRebuilt || got.IsNew != c.isNew {
			t.Errorf("%s: %+v, %v, want rebuilt %v, new %v: %s", c.name, got, err, c.isRebuilt, c.isNew, text)
		}
	}
}

// TestCombineRefuses holds that stores that do not go together are refused in words that say
// why, and that what is there stays.
func TestCombineRefuses(t *testing.T) {
	dir := t.TempDir()
	records := filepath.Join(dir, "records")
	if _, err := demo.Write(records, demo.Options{Events: 1, Stations: 2, Seed: 3}); err != nil {
		t.Fatal(err)
	}
	ingest := []string{"ingest", records, "--periods", "1", "--dampings", "5%"}
	in := func(folder string) string {
		if err := os.MkdirAll(filepath.Join(dir, folder), 0o777); err != nil {
			t.Fatal(err)
		}
		return filepath.Join(dir, folder)
	}
	shards := ingestShards(t, in("a"), 2, ingest)
	threes := ingestShards(t, in("b"), 3, ingest)
	raw := ingestShards(t, in("c"), 2, append(ingest, "--recipe", "as-delivered"))
	finer := ingestShards(t, in("d"), 2, []string{"ingest", records, "--periods", "1,2", "--dampings", "5%"})
	whole := filepath.Join(dir, "whole.db")
	did(t, whole, exitDone, ingest...)
	out := filepath.Join(dir, "out.db")
	combines(t, exitDone, out, shards...)
	before := digestOfStore(t, out)
	for _, c := range []struct {
		name, want string
		shards     []string
	}{
		{"another split", "shards of one split only", []string{shards[0], threes[1]}},
		{"some of another split than the store's", "give all 3 shards", threes[1:]},
		{"a recipe beside another", "recipe standard", []string{shards[0], raw[1]}},
		{"one shard of another recipe", "give all 2 shards", raw[1:]},
		{"a grid beside another", "periods", []string{shards[0], finer[1]}},
		{"one twice", "are both shard 1 of 2", []string{shards[0], raw[0]}},
		{"no shard", "no shard", []string{whole}},
		{"what is combined", "it is what is combined of 2 shards, and no shard itself", []string{combined(t, dir, shards)}},
		{"nothing there", "no such store", []string{filepath.Join(dir, "nothing.db")}},
		{"a folder", "it is a folder", []string{records}},
		{"half a shard", "half.db: the file is damaged, or not all of it is there", []string{halfOf(t, shards[0])}},
		{"half a shard", "remove the file and run ", []string{halfOf(t, shards[0])}},
		{"no store", "not a swaybook store", []string{filepath.Join(records, "catalogue.csv")}},
	} {
		if text := combines(t, exitFailed, out, c.shards...); !strings.Contains(text, c.want) {
			t.Errorf("%s: %q does not say %q", c.name, text, c.want)
		}
		if got := digestOfStore(t, out); got != before {
			t.Errorf("%s changed the store", c.name)
		}
		if strings.HasPrefix(c.want, "give all") {
			continue // depends on what is there
		}
		combines(t, exitFailed, filepath.Join(dir, "none.db"), c.shards...)
		if left, _ := filepath.Glob(filepath.Join(dir, "none.db*")); len(left) > 0 {
			t.Errorf("%s: a combination that was refused leaves %v", c.name, left)
		}
	}
	if text := combines(t, exitFailed, records, shards...); !strings.Contains(text, records+": it is a folder") {
		t.Errorf("into a folder: %q", text)
	}
	if err := os.Link(shards[0], filepath.Join(dir, "hard.db")); err != nil {
		t.Log(err)
	} else {
		if text := combines(t, exitUsage, filepath.Join(dir, "hard.db"), shards...); !strings.Contains(text, "is named as a shard") {
			t.Errorf("into another name of a shard: %q", text)
		}
		if left, _ := filepath.Glob(filepath.Join(dir, "hard.db?*")); len(left) > 0 {
			t.Errorf("left beside another name of a shard: %v", left)
		}
	}
	if text := combines(t, exitFailed, whole, shards...); !strings.Contains(text, "combine into "+whole+": the store holds records") {
		t.Errorf("into what was ingested: %q", text)
	}
	combines(t, exitUsage, out, out)
	combines(t, exitUsage, out)
	for _, args := range [][]string{ingest, append(ingest, "--shard", "1/2")} {
		if code := runQuietly(t.Context(), out, args...); code != exitFailed {
			t.Errorf("ingest into what is combined: exit code %d", code)
		}
	}
	if code := runQuietly(t.Context(), shards[0], append(ingest, "--shard", "2/2")...); code != exitFailed {
		t.Errorf("another shard into a shard's store: exit code %d", code)
	}
	if code := runQuietly(t.Context(), shards[0], ingest...); code != exitFailed {
		t.Errorf("everything into a shard's store: exit code %d", code)
	}
	combines(t, exitDone, out, raw...) // all of another recipe
}

// halfOf is a copy of a file of which only half has come.
func halfOf(t *testing.T, file string) string {
	t.Helper()
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	half := filepath.Join(t.TempDir(), "half.db")
	if err := os.WriteFile(half, data[:len(data)/2], 0o666); err != nil {
		t.Fatal(err)
	}
	return half
}

// combined combines shards into a store of its own.
func combined(t *testing.T, dir string, shards []string) string {
	t.Helper()
	out := filepath.Join(dir, "combined.db")
	combines(t, exitDone, out, shards...)
	return out
}
