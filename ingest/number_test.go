package ingest

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

func TestParseNumber(t *testing.T) {
	good := map[string]float64{
		"0": 0, "-0": math.Copysign(0, -1), "1": 1, "+1": 1, "-12.5": -12.5,
		".5": 0.5, "-.5": -0.5, "5.": 5, "0005.2500": 5.25,
		"1e3": 1000, "1E+3": 1000, "1.5D-02": 0.015, "2.5d1": 25,
		".12345-103": .12345e-103, "1.5+003": 1500, "-1.-010": -1e-10,
		"9007199254740992":             9007199254740992,
		"9007199254740993":             9007199254740992, // 2⁵³+1: a tie, to even
		"9007199254740993.0000001":     9007199254740994,
		"123456789012345678901234567":  123456789012345678901234567,
		"0." + strings.Repeat("0", 30): 0,
		"1e22":                         1e22, "1e23": 1e23, "1e-22": 1e-22, "1e-23": 1e-23,
		"4.9e-324": 5e-324, "1e-400": 0, "0e999999999999": 0, "1.7976931348623157e308": math.MaxFloat64,
	}
	for in, want := range good {
		got, ok := parseNumber([]byte(in))
		if !ok || math.Float64bits(got) != math.Float64bits(want) {
			t.Errorf("parseNumber(%q) = %v, %v, want %v, true", in, got, ok, want)
		}
	}
}

func TestParseNumberRefuses(t *testing.T) {
	for _, in := range []string{
		"", " ", " 1", "1 ", ".", "-", "+", "-.", "e5", ".e5", "1e", "1e+", "1d-", "1.5-", "1 2",
		"nan", "NaN", "inf", "-Inf", "Infinity", "0x10", "0x1p4", "1_000", "*", "**********",
		"1.2.3", "1,5", "--1", "+-1", "1e5.0", "1e400", "-1.0E+999",
		"2.5000000-1.1212730", // two fields that touch
		"2026-003",            // no point: a date, not an exponent
		"1.5-03", "1.5-0003",  // Fortran writes three digits
		"1.302E 00", "1\x00", "١",
	} {
		if got, ok := parseNumber([]byte(in)); ok {
			t.Errorf("parseNumber(%q) = %v, true, want a refusal", in, got)
		}
	}
}

// TestParseNumberIsExact compares with strconv over the shapes that record files
// print, where both must give the same bits.
func TestParseNumberIsExact(t *testing.T) {
	const seed = 20260401
	r := rand.New(rand.NewPCG(seed, 1))
	for i := range 200000 {
		x := math.Float64frombits(r.Uint64())
		if i%2 == 0 {
			x = (r.Float64() - 0.5) * math.Pow(10, float64(r.IntN(40)-20))
		}
		if math.IsNaN(x) || math.IsInf(x, 0) {
			continue
		}
		verb := []byte{'e', 'f', 'g', 'E'}[r.IntN(4)]
		in := strconv.FormatFloat(x, verb, r.IntN(22)-1, 64)
		want, err := strconv.ParseFloat(in, 64)
		got, ok := parseNumber([]byte(in))
		if ok != (err == nil) || ok && math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("seed %d, case %d: parseNumber(%q) = %v, %v, want %v, %v", seed, i, in, got, ok, want, err)
		}
		line := []byte(in + " 123456789") // what follows must not reach into the number
		if got, n := leadingNumber(line, '.'); n > 0 && (n != len(in) || math.Float64bits(got) != math.Float64bits(want)) {
			t.Fatalf("seed %d, case %d: leadingNumber(%q) = %v, %d, want %v, %d", seed, i, line, got, n, want, len(in))
		}
	}
}

func TestParseNumberDoesNotAllocate(t *testing.T) {
	fields := [][]byte{[]byte("-123.45678"), []byte("1.234567E-05"), []byte("0.1234567890123456D+30"), []byte("bad")}
	n := testing.AllocsPerRun(100, func() {
		for _, f := range fields {
			parseNumber(f)
		}
	})
	if n != 0 {
		t.Errorf("parseNumber allocates %v times for %d fields, want 0", n, len(fields))
	}
}

func FuzzParseNumber(f *testing.F) {
	for _, s := range []string{"1.5", "-.5E-03", "1.5-103", "1e400", "*", "9007199254740993", "0x1p4"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		got, ok := parseNumber([]byte(s))
		if !ok {
			return
		}
		if math.IsNaN(got) || math.IsInf(got, 0) {
			t.Fatalf("parseNumber(%q) = %v, want a finite number", s, got)
		}
		plain := strings.NewReplacer("d", "e", "D", "e").Replace(s)
		want, err := strconv.ParseFloat(plain, 64)
		if err == nil && math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("parseNumber(%q) = %v, want %v", s, got, want)
		}
	})
}

func BenchmarkParseNumber(b *testing.B) {
	r := rand.New(rand.NewPCG(7, 7))
	for _, form := range []string{"%.3f", "%.5f", "%.7f", "%.6E", "%.16e"} {
		fields, size := make([][]byte, 1000), 0
		for i := range fields {
			fields[i] = fmt.Appendf(nil, form, (r.Float64()-0.5)*400)
			size += len(fields[i])
		}
		b.Run(form, func(b *testing.B) {
			b.SetBytes(int64(size))
			b.ReportAllocs()
			sum := 0.0
			for b.Loop() {
				for _, f := range fields {
					v, _ := parseNumber(f)
					sum += v
				}
			}
			_ = sum
		})
	}
}
