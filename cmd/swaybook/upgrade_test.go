package main

import (
	"bytes"
	"compress/gzip"
	"database/sql"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"swaybook/db"
)

// TestUpgrade: stores of earlier schemas are brought up to date without loss, and a run of a
// study makes them what a new store of the same files is, to the digest. Of one whose solver
// is this program's nothing is computed: every bit of its spectra is this program's already.
func TestUpgrade(t *testing.T) {
	records, err := filepath.Abs(filepath.Join("..", "..", "testdata", "records"))
	if err != nil {
		t.Fatal(err)
	}
	fresh := filepath.Join(t.TempDir(), "s.db")
	upgradeRun(t, fresh, records)
	want := digestOf(t, fresh)
	for _, c := range []struct {
		file       string
		digest     string // of what was published, once migrated; made by this program
		recomputed int    // components
		series     string // what samples are of which component, then
	}{
		{"schema-1", "1 78e3f25d42eefd3662f2bbb09b5f9435bd48e2ea72b28bdda55dbbe568c47102", 12, samplesOf},
		{"schema-2", "1 1ad9ce20139c94c902f91ed9042b88f1c0c0253dbc5ca424c4c3e341e8496a26", 12, samplesOf},
		{"schema-3", "1 6a6d80b4d68b68e1b70b26dfb0b8590bb73e8e4779bd21ecc02f5a224a0b493b", 12, samplesOf},
		{"schema-17", "1 89b8a6d628d11df05153f88253369dd15287d118f08d55609e787c64d620691e", 0, seriesOf},
	} {
		t.Run(c.file, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "s.db")
			unpackStore(t, c.file, path)
			before := motionsIn(t, path, c.series)
			store, err := db.Create(t.Context(), path, db.AnySolver)
			if err == nil {
				err = store.Close()
			}
			if err != nil {
				t.Fatal(err)
			}
			if after := motionsIn(t, path, seriesOf); len(before) != 12 || !reflect.DeepEqual(after, before) {
				t.Errorf("components %v, before %v", after, before)
			}
			if got := digestOf(t, path); got != c.digest {
				t.Errorf("once migrated its digest is %s, want %s", got, c.digest)
			}
			verifyAll(t, path, "once migrated")
			if s := upgradeRun(t, path, records); s.Ingest == nil || s.Ingest.Recomputed != c.recomputed {
				t.Errorf("computed anew: %+v, want %d", s.Ingest, c.recomputed)
			}
			if got := digestOf(t, path); got != want {
				t.Errorf("after a run its digest is %s, that of a new store %s", got, want)
			}
			verifyAll(t, path, "after a run")
		})
	}
}

// TestUpgradeByIngest: a store of an earlier schema that is ingested into goes on with what it
// holds: the same records, and from their stored samples the spectra that a new store of the
// same files has, to the bit. What the files' headers state beside, and what is found in their
// samples, is what the earlier program read of them: a study's run reads it anew.
func TestUpgradeByIngest(t *testing.T) {
	records, err := filepath.Abs(filepath.Join("..", "..", "testdata", "records"))
	if err != nil {
		t.Fatal(err)
	}
	ingest := func(t *testing.T, path string, flags ...string) {
		args := append([]string{"swaybook", "--store", path, "ingest", "--recipe", "as-delivered"}, append(flags, upgradeSources(records)...)...)
		var stdout, stderr bytes.Buffer
		if code := run(t.Context(), args, &stdout, &stderr); code != exitRejected {
			t.Fatalf("ingest: exit code %d: %s%s", code, stdout.String(), stderr.String())
		}
	}
	fresh := filepath.Join(t.TempDir(), "s.db")
	ingest(t, fresh, "--periods", "0.1,0.2,0.5,1,2", "--dampings", "2%,5%")
	const ordinates = `SELECT printf('%s %s %g %g %!.17g', record, component, damping, period_s, sd_m) FROM ordinate ORDER BY 1`
	motions, want := motionsIn(t, fresh, seriesOf), textsIn(t, fresh, ordinates)
	if len(want) != 200 {
		t.Fatalf("%d ordinates of 12 components and 4 pairs, want 200", len(want))
	}
	for _, file := range []string{"schema-1", "schema-2", "schema-3", "schema-17"} {
		t.Run(file, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "s.db")
			unpackStore(t, file, path)
			ingest(t, path)
			if got := motionsIn(t, path, seriesOf); !reflect.DeepEqual(got, motions) {
				t.Errorf("components %v, of a new store %v", got, motions)
			}
			if got := textsIn(t, path, ordinates); !reflect.DeepEqual(got, want) {
				t.Errorf("ordinates %v, of a new store %v", got, want)
			}
			verifyAll(t, path, "after an ingest")
		})
	}
}

// unpackStore puts a store of an earlier program at the path.
func unpackStore(t *testing.T, name, path string) {
	t.Helper()
	packed, err := os.Open(filepath.Join("..", "..", "testdata", "stores", name+".db.gz"))
	if err != nil {
		t.Fatal(err)
	}
	defer packed.Close()
	unpacked, err := gzip.NewReader(packed)
	if err != nil {
		t.Fatal(err)
	}
	text, err := io.ReadAll(unpacked)
	if err == nil {
		err = os.WriteFile(path, text, 0o666)
	}
	if err != nil {
		t.Fatal(err)
	}
}

// How samples are joined to components, in the first schemas and since.
const samplesOf, seriesOf = "s.component_id = c.id", "s.id = c.series_id"

// motionsIn are the components of a store of any schema, with the digests of their samples,
// which join relates.
func motionsIn(t *testing.T, path, join string) []string {
	t.Helper()
	return textsIn(t, path, `SELECT r.code || ' ' || c.role || ' ' || s.sha256 FROM component c JOIN record r ON r.id = c.record_id JOIN series s ON `+join+` ORDER BY 1`)
}

// textsIn is the one column that a query gives.
func textsIn(t *testing.T, path, query string) (out []string) {
	t.Helper()
	store, err := sql.Open("sqlite", "file:"+path+"?mode=ro")
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	rows, err := store.Query(query)
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	for rows.Next() {
		var one string
		if err := rows.Scan(&one); err != nil {
			t.Fatal(err)
		}
		out = append(out, one)
	}
	return out
}

func digestOf(t *testing.T, path string) string {
	t.Helper()
	digest, err := db.Digest(t.Context(), path)
	if err != nil {
		t.Fatal(err)
	}
	return digest
}

func verifyAll(t *testing.T, path, when string) {
	t.Helper()
	var stdout, stderr bytes.Buffer
	if code := run(t.Context(), []string{"swaybook", "--store", path, "verify", "--all"}, &stdout, &stderr); code != exitDone {
		t.Errorf("%s: verify: exit code %d: %s%s", when, code, stdout.String(), stderr.String())
	}
}

// upgradeSources are the files of which the earlier programs made their stores.
func upgradeSources(records string) (out []string) {
	for _, name := range []string{"at2/NWT_CDH000.AT2", "at2/NWT_CDH090.AT2", "at2/NWT_CDH-UP.AT2", "at2/damaged-truncated.AT2", "knet"} {
		out = append(out, filepath.Join(records, filepath.FromSlash(name)))
	}
	return out
}

// upgradeRun makes the store that of the files of which the earlier programs made theirs.
func upgradeRun(t *testing.T, path, records string) studyState {
	t.Helper()
	var sources []string
	for _, path := range upgradeSources(records) {
		sources = append(sources, fmt.Sprintf("'%s'", path))
	}
	file := filepath.Join(filepath.Dir(path), "s.toml")
	text := "name = 'Upgrade'\nstore = 's.db'\nsources = [" + strings.Join(sources, ", ") + "]\nrecipe = 'as-delivered'\nperiods = [0.1, 0.2, 0.5, 1, 2]\ndampings = ['2%', '5%']\nstate = 'state.json'\n"
	if err := os.WriteFile(file, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	return reprocessed(t, file, exitRejected)
}
