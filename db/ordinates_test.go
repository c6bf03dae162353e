package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// anySD are values of every size that is not negative, next to powers of two and ten among
// them.
func anySD(n int, seed uint64) []float64 {
	rng := rand.New(rand.NewPCG(seed, 1))
	out := []float64{0, 1, 0.1, 1.0 / 3, 5e-324, 2.5e-308, 0x1p-1022, math.Nextafter(0x1p-1022, 0), math.MaxFloat64}
	for i := len(out); i < n; i++ {
		var x float64
		switch bits := rng.Uint64(); i % 5 {
		case 0: // any double
			x = math.Float64frombits(bits >> 1)
		case 1: // of the size of spectra
			x = math.Exp(60*rng.Float64() - 55)
		case 2: // next to a power of two
			x = math.Float64frombits(uint64(900+bits%200)<<52 - 2 + bits>>40%4)
		case 3: // next to a power of ten
			x = math.Nextafter(math.Pow10(int(bits%60)-50), float64(bits%2))
		case 4: // subnormal
			x = math.Float64frombits(bits >> 12)
		}
		if math.IsNaN(x) || math.IsInf(x, 0) {
			x = 0
		}
		out = append(out, x)
	}
	return out
}

func firstUnlike(got, want []float64) (text string) {
	for i := range want {
		if i >= len(got) || math.Float64bits(got[i]) != math.Float64bits(want[i]) {
			return fmt.Sprintf("value %d of %d is not %v: %v", i, len(got), want[i], got[i:min(i+1, len(got))])
		}
	}
	return ""
}

func TestOrdinatesRoundTrip(t *testing.T) {
	values := anySD(1000, 5)
	data := encodeOrdinates(nil, values)
	if len(data) != OrdinateWidth*len(values) {
		t.Fatalf("%d bytes, want %d", len(data), OrdinateWidth*len(values))
	}
	got := make([]float64, len(values))
	if err := Ordinates(data).Decode(got); err != nil {
		t.Fatal(err)
	}
	if text := firstUnlike(got, values); text != "" {
		t.Error(text)
	}
	if err := Ordinates(data[1:]).Decode(got); err == nil {
		t.Error("no error for a short spectrum")
	}
}

// decimals are values as earlier programs stored them.
func decimals(values []float64) (out []byte) {
	for _, x := range values {
		out = fmt.Appendf(out, "%24s", strconv.FormatFloat(x, 'e', 16, 64))
	}
	return out
}

// Decimals become the doubles of which they were written.
func TestDoublesOfDecimals(t *testing.T) {
	values := anySD(100_000, 6)
	if !slices.Equal(doublesOfDecimals(decimals(values)), encodeOrdinates(nil, values)) {
		t.Error("not the values that were written")
	}
	for _, damaged := range []string{"1", "  x.2345678901234567e-04", "  1.2345678901234567x-04", " -1.2345678901234567e-04"} {
		if data := doublesOfDecimals([]byte(damaged)); data != nil {
			t.Errorf("%q became %x", damaged, data)
		}
	}
}

// viewStore is a store of three spectra, the second of which, of record R, has these SD at as
// many periods.
func viewStore(t *testing.T, sd []float64) *Store {
	t.Helper()
	s := newStore(t)
	grid := Grid{Dampings: []float64{0.05}}
	for i := range sd {
		grid.PeriodsS = append(grid.PeriodsS, 0.01+0.001*float64(i))
	}
	update(t, s, func(ctx context.Context, tx *Tx) error {
		_, err := tx.StartRun(ctx, "ingest", "test", startsAt)
		if err != nil {
			return err
		}
		g, err := tx.PutGeneration(ctx, Recipe{Name: "as-delivered", Steps: "[]"}, grid, testSolver)
		if err != nil {
			return err
		}
		err = errors.Join(add(ctx, tx, g, "P", RoleH1, 1), add(ctx, tx, g, "R", RoleH1, 1), add(ctx, tx, g, "S", RoleH1, 1))
		tx.begun.motions[1][0] = encodeOrdinates(nil, sd)
		return err
	})
	return s
}

// sdOf is the one column of a query.
func sdOf(t *testing.T, q queryer, query string) []float64 {
	t.Helper()
	rows, err := q.QueryContext(t.Context(), query)
	if err != nil {
		t.Fatal(err)
	}
	out, err := collect(rows, func(x *float64) []any { return []any{x} })
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// The view has the very doubles that are stored, in this program and in any other.
func TestViewHasTheStoredDoubles(t *testing.T) {
	want := anySD(5000, 7)
	s := viewStore(t, want)
	if text := firstUnlike(sdOf(t, s.read, `SELECT sd_m FROM ordinate WHERE record = 'R' ORDER BY period_s`), want); text != "" {
		t.Error(text)
	}
	client, err := exec.LookPath("sqlite3")
	if err != nil {
		t.Skip("sqlite3 is not installed")
	}
	copied := filepath.Join(t.TempDir(), "copied.db")
	command := exec.CommandContext(t.Context(), client, copied)
	command.Env = append(command.Environ(), "HOME="+t.TempDir())
	command.Stdin = strings.NewReader(fmt.Sprintf("ATTACH '%s' AS store; CREATE TABLE copied AS SELECT period_s, sd_m FROM store.ordinate WHERE record = 'R';", s.path))
	if text, err := command.CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	handle, err := sql.Open("sqlite", copied)
	if err != nil {
		t.Fatal(err)
	}
	defer handle.Close()
	if text := firstUnlike(sdOf(t, handle, `SELECT sd_m FROM copied ORDER BY period_s`), want); text != "" {
		t.Error("sqlite3: " + text)
	}
}

// Of a part that is cut the view has what is whole, and nothing instead of the rest, nor of what
// is lost.
func TestViewOfDamagedParts(t *testing.T) {
	want := anySD(20, 8)
	const motions, place = 3, 1
	last := partID(1, 0, 2) // of the periods from 16 on
	for damage, values := range map[string]int{
		fmt.Sprintf(`UPDATE tile_part SET sd_m = substr(sd_m, 1, %d) WHERE id = %d`, OrdinateWidth*(3*motions+place+1), last):   20,
		fmt.Sprintf(`UPDATE tile_part SET sd_m = substr(sd_m, 1, %d) WHERE id = %d`, OrdinateWidth*(3*motions+place+1)-1, last): 19,
		fmt.Sprintf(`UPDATE tile_part SET sd_m = substr(sd_m, 1, %d) WHERE id = %d`, OrdinateWidth*(motions+place), last):       17,
		fmt.Sprintf(`DELETE FROM tile_part WHERE id = %d`, last):                                                                16,
		fmt.Sprintf(`UPDATE tile_part SET sd_m = CAST(substr(sd_m, 1, %d) || x'ffffffffffffffff' || substr(sd_m, %d) AS BLOB) WHERE id = %d`,
			OrdinateWidth*(3*motions+place), OrdinateWidth*(3*motions+place+1)+1, last): 19,
		`UPDATE spectrum SET place = 3 WHERE place = 1`: 0,
		`DELETE FROM tile`: 0,
	} {
		s := viewStore(t, want)
		if _, err := s.write.Exec(damage); err != nil {
			t.Fatal(err)
		}
		got := sdOf(t, s.read, `SELECT sd_m FROM ordinate WHERE record = 'R' ORDER BY period_s`)
		if text := firstUnlike(got, want[:values]); text != "" || len(got) != values {
			t.Errorf("%s: %d values, want %d: %s", damage, len(got), values, text)
		}
	}
}

func BenchmarkEncodeOrdinates(b *testing.B) {
	values := anySD(251, 9)
	var data []byte
	b.SetBytes(int64(8 * len(values)))
	for b.Loop() {
		data = encodeOrdinates(data[:0], values)
	}
}

func BenchmarkDecodeOrdinates(b *testing.B) {
	values := anySD(251, 9)
	data := encodeOrdinates(nil, values)
	b.SetBytes(int64(8 * len(values)))
	for b.Loop() {
		if err := Ordinates(data).Decode(values); err != nil {
			b.Fatal(err)
		}
	}
}
