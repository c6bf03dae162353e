package main

import (
	"bytes"
	"compress/gzip"
	"database/sql"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
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
		{"schema-1", "2 1318f345c5bf3ffeff01f5e2c955e3ee9486064e2698ea3fba75d812e0630b9b", 12, samplesOf},
		{"schema-2", "2 93ce82a35f05828873a64cfa377eb810b97db603921cd33b303725f31ff1b4ef", 12, samplesOf},
		{"schema-3", "2 a3ec6885f3a56a5d551d48c4e58f39e3451a5ec1cb7f9c819f56a9682ea03e2e", 12, samplesOf},
		{"schema-17", "2 e9be77eadcd00596631de6dc66fa744cd475cfd3cb8ecb905440f25a563a842c", 0, seriesOf},
		{"schema-20", "2 e9be77eadcd00596631de6dc66fa744cd475cfd3cb8ecb905440f25a563a842c", 0, seriesOf},
		{"schema-22", "2 e9be77eadcd00596631de6dc66fa744cd475cfd3cb8ecb905440f25a563a842c", 0, seriesOf},
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
	for _, file := range []string{"schema-1", "schema-2", "schema-3", "schema-17", "schema-20", "schema-22"} {
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

// TestUpgradeOfSpectra: spectra that were decimals become the doubles of which these were
// written, and what was damaged before stays so: it gets no checksum by which it would pass.
func TestUpgradeOfSpectra(t *testing.T) {
	path := filepath.Join(t.TempDir(), "s.db")
	unpackStore(t, "schema-20", path)
	damaged := map[string]bool{}
	for _, damage := range []string{
		`UPDATE spectrum SET sd_m = cast(replace(cast(sd_m AS TEXT), '3', '4') AS BLOB) WHERE id = (SELECT min(id) FROM spectrum) RETURNING cast(id AS TEXT)`,
		`UPDATE spectrum SET sd_m = substr(sd_m, 1, 48) WHERE id = (SELECT max(id) FROM spectrum) RETURNING cast(id AS TEXT)`,
		// Its checksum was taken when it was damaged already.
		`UPDATE spectrum SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT cast(replace(cast(sd_m AS TEXT), 'e', 'x') AS BLOB) AS d)) WHERE id = 257 RETURNING cast(id AS TEXT)`,
	} {
		damaged[strings.Join(textsOf(t, "file:"+path, damage), " ")] = true
	}
	var want []string
	for _, line := range textsIn(t, path, `SELECT id || ' ' || cast(sd_m AS TEXT) FROM spectrum ORDER BY id`) {
		fields := strings.Fields(line)
		text := fields[0] + " "
		if damaged[fields[0]] {
			want = append(want, text+"damaged")
			continue
		}
		for _, decimal := range fields[1:] {
			x, err := strconv.ParseFloat(decimal, 64)
			if err != nil {
				t.Fatal(err)
			}
			text += fmt.Sprintf("%016X", math.Float64bits(x))
		}
		want = append(want, text)
	}
	store, err := db.Create(t.Context(), path, db.AnySolver)
	if err == nil {
		err = store.Close()
	}
	if err != nil {
		t.Fatal(err)
	}
	got := textsIn(t, path, `SELECT id || ' ' || iif(trim(sd, 'F') = '', 'damaged', sd) FROM (
		SELECT 256 * s.computation_id + d.position AS id, group_concat(hex(substr(w.sd_m, 8 * (p.position * t.motions + s.place) + 1, 8)), '' ORDER BY p.position) AS sd
		FROM spectrum s JOIN tile t ON t.id = s.tile_id JOIN grid_damping d JOIN tile_part w ON w.id = (t.id << 20) + (d.position << 12) JOIN grid_period p GROUP BY 1) ORDER BY id`)
	if len(want) != 40 || len(damaged) != 3 || !reflect.DeepEqual(got, want) {
		t.Errorf("%d spectra, %d of them damaged: %v, want %v", len(want), len(damaged), got, want)
	}
	if n := textsIn(t, path, `SELECT count(*) || '' FROM ordinate`); n[0] != "185" {
		t.Errorf("the view has %s ordinates, want 185", n[0])
	}
	var stdout, stderr bytes.Buffer
	code := run(t.Context(), []string{"swaybook", "--store", path, "verify"}, &stdout, &stderr)
	if n := strings.Count(stdout.String(), "not what was stored; questions leave it out"); code != exitFailed || n != 3 {
		t.Errorf("verify: exit code %d, %d spectra are not what was stored: %s%s", code, n, stdout.String(), stderr.String())
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
	return textsOf(t, "file:"+path+"?mode=ro", query)
}

// textsOf is the same of a statement, which may change the store.
func textsOf(t *testing.T, uri, query string) (out []string) {
	t.Helper()
	store, err := sql.Open("sqlite", uri)
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
