package db

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// motion is seeded noise under an envelope, written with so many decimals in a
// unit as a text record would, and read back.
func motion(n, decimals int, unit float64) []float64 { return writtenAs(n, 'f', decimals, unit) }

// withExponents is the same, written with an exponent and so many digits.
func withExponents(n, digits int, unit float64) []float64 {
	return writtenAs(n, 'e', digits-1, unit)
}

func writtenAs(n int, format byte, precision int, unit float64) []float64 {
	rng := rand.New(rand.NewPCG(11, 7))
	xs := make([]float64, n)
	for i := range xs {
		t := float64(i) / float64(n)
		text := strconv.FormatFloat(100*t*math.Exp(-5*t)*rng.NormFloat64(), format, precision, 64)
		x, err := strconv.ParseFloat(text, 64)
		if err != nil {
			panic(err)
		}
		xs[i] = x*unit + 0
	}
	return xs
}

func TestSamplesRoundTrip(t *testing.T) {
	tests := []struct {
		name    string
		samples []float64
		unit    float64
		layout  byte
	}{
		{"cm/s² with six decimals", motion(4000, 6, 0.01), 0.01, layoutDecimal},
		{"g with seven decimals", motion(4000, 7, 9.80665), 9.80665, layoutDecimal},
		{"m/s²", motion(400, 3, 1), 1, layoutDecimal},
		{"wrong unit", motion(400, 3, 0.01), 9.80665, layoutPlanes},
		{"no unit", motion(400, 3, 1), 0, layoutPlanes},
		{"full doubles", []float64{math.Pi, -math.E, 1e-300, 5e-324, math.MaxFloat64}, 1, layoutPlanes},
		{"g with exponents and eight digits", withExponents(4000, 8, 9.80665), 9.80665, layoutScientific},
		{"cm/s² with exponents and five digits", withExponents(4000, 5, 0.01), 0.01, layoutScientific},
		{"exponents and fifteen digits", withExponents(400, 15, 1), 1, layoutScientific},
		{"exponents and seventeen digits", withExponents(400, 17, 1), 1, layoutPlanes},
		{"one digit", []float64{1e-13, 2e-11, -3e-10, 0, 1e-5}, 1, layoutScientific},
		{"exponents from 7 to 21", []float64{1e-21, 1e-10, 1e-7, 0, -1e-7}, 1, layoutScientific},
		{"below all powers", []float64{1e-23, 1e-20}, 1, layoutPlanes},
		{"digits beyond all powers", []float64{1e-22, 1.5e-21}, 1, layoutPlanes},
		{"negative zero", []float64{0, math.Copysign(0, -1), 1}, 1, layoutScientific},
		{"zeros", make([]float64, 50), 0.01, layoutDecimal},
		{"both zeros", []float64{0, math.Copysign(0, -1)}, 1, layoutScientific},
		{"whole numbers after decimals", []float64{0.0001, 9.1e12, -9.1e12}, 1, layoutScientific},
		{"whole numbers beyond all digits", []float64{1e-5, 9.1e15, -9.1e15}, 1, layoutPlanes},
		{"empty", nil, 1, layoutDecimal},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			data, digest := EncodeSamples(tt.samples, tt.unit)
			if data[0] != tt.layout {
				t.Errorf("layout = %d, want %d", data[0], tt.layout)
			}
			got, err := DecodeSamples(data, len(tt.samples), digest)
			if err != nil {
				t.Fatal(err)
			}
			for i, x := range tt.samples {
				if math.Float64bits(got[i]) != math.Float64bits(x) {
					t.Fatalf("sample %d = %v, want %v", i, got[i], x)
				}
			}
		})
	}
}

// Numbers of all sizes and digits, as files write them, come back.
func TestTextSamplesRoundTrip(t *testing.T) {
	const seed = 3
	rng := rand.New(rand.NewPCG(seed, 1))
	layouts := map[byte]int{}
	for round := range 3000 {
		unit := []float64{1, 0.01, 9.80665, 0.3048, 9.80665 / 1000}[rng.IntN(5)]
		format, precision, decades := "ef"[rng.IntN(2)], rng.IntN(16), rng.Float64()*20
		samples := make([]float64, rng.IntN(200))
		for i := range samples {
			x, err := strconv.ParseFloat(strconv.FormatFloat(rng.NormFloat64()*math.Pow(10, 1-rng.Float64()*decades), format, precision, 64), 64)
			if err != nil {
				t.Fatal(err)
			}
			samples[i] = x * unit
		}
		data, digest := EncodeSamples(samples, unit)
		layouts[data[0]]++
		got, err := DecodeSamples(data, len(samples), digest)
		if err != nil {
			t.Fatalf("seed %d, round %d: %v", seed, round, err)
		}
		for i, x := range samples {
			if math.Float64bits(got[i]) != math.Float64bits(x) {
				t.Fatalf("seed %d, round %d, layout %d: sample %d = %v, want %v", seed, round, data[0], i, got[i], x)
			}
		}
	}
	for _, layout := range []byte{layoutDecimal, layoutScientific, layoutPlanes} {
		if layouts[layout] < 100 {
			t.Errorf("seed %d: layout %d occurs %d times, want it tested more", seed, layout, layouts[layout])
		}
	}
}

// A series of a former layout is no damaged one of another.
func TestFormerLayoutsAreUnknown(t *testing.T) {
	for _, layout := range []byte{0, 1, 2, 6} {
		_, err := DecodeSamples([]byte{layout, 3, 4}, 10, "")
		if want := fmt.Sprintf("unknown layout %d", layout); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("layout %d: %v, want %q", layout, err, want)
		}
	}
}

// The layouts of text exist to be smaller: half of the raw doubles at most.
func TestTextLayoutsAreSmall(t *testing.T) {
	for name, samples := range map[string][]float64{
		"decimals": motion(8000, 6, 0.01), "exponents": withExponents(8000, 8, 0.01),
	} {
		data, _ := EncodeSamples(samples, 0.01)
		if raw := 8 * len(samples); len(data) > raw/2 {
			t.Errorf("%s: %d bytes for %d raw", name, len(data), raw)
		} else {
			t.Logf("%s: %d bytes for %d raw", name, len(data), raw)
		}
	}
}

func TestDecodeSamplesRefusesDamage(t *testing.T) {
	for layout, samples := range map[byte][]float64{
		layoutDecimal: motion(300, 4, 1), layoutScientific: withExponents(300, 8, 1), layoutPlanes: withExponents(300, 17, 1),
	} {
		data, digest := EncodeSamples(samples, 1)
		if data[0] != layout {
			t.Fatalf("layout = %d, want %d", data[0], layout)
		}
		damaged := map[string]struct {
			data []byte
			n    int
			sum  string
		}{
			"empty":          {nil, 300, digest},
			"unknown layout": {append([]byte{9}, data[1:]...), 300, digest},
			"cut":            {data[:len(data)/2], 300, digest},
			"head only":      {data[:4], 300, digest},
			"longer":         {append(data[:len(data):len(data)], 0), 300, digest},
			"too few":        {data, 299, digest},
			"too many":       {data, 301, digest},
			"huge count":     {data, 1 << 40, digest},
			"other digest":   {data, 300, "00"},
			"other scale":    {append([]byte{data[0], data[1] + 1}, data[2:]...), 300, digest},
			"other start":    {append([]byte{data[0], data[1], data[2] + 1}, data[3:]...), 300, digest},
		}
		for name, d := range damaged {
			if _, err := DecodeSamples(d.data, d.n, d.sum); err == nil {
				t.Errorf("layout %d, %s: no error", layout, name)
			}
		}
	}
}

func FuzzDecodeSamples(f *testing.F) {
	data, _ := EncodeSamples(motion(50, 3, 1), 1)
	f.Add(data, 50)
	data, _ = EncodeSamples(withExponents(50, 8, 1), 1)
	f.Add(data, 50)
	data, _ = EncodeSamples([]float64{math.Pi, math.E}, 1)
	f.Add(data, 2)
	f.Fuzz(func(t *testing.T, data []byte, n int) {
		if n < 0 || n > 1<<16 {
			return
		}
		if xs, err := decodeSamples(data, n); err == nil && len(xs) != n {
			t.Errorf("%d samples, want %d", len(xs), n)
		}
	})
}

// benchmarkSeries are 8000 samples each: of six decimals in cm/s², of eight digits
// and an exponent in g, and full doubles.
func benchmarkSeries(b *testing.B, run func(b *testing.B, samples []float64, unit float64)) {
	const n = 8000
	doubles := motion(n, 3, 1)
	for i := range doubles {
		doubles[i] /= 3
	}
	for _, s := range []struct {
		name    string
		samples []float64
		unit    float64
	}{
		{"decimals", motion(n, 6, 0.01), 0.01},
		{"exponents", withExponents(n, 8, 9.80665), 9.80665},
		{"doubles", doubles, 1},
	} {
		b.Run(s.name, func(b *testing.B) {
			b.SetBytes(8 * n)
			b.ReportAllocs()
			run(b, s.samples, s.unit)
		})
	}
}

func BenchmarkEncodeSamples(b *testing.B) {
	benchmarkSeries(b, func(b *testing.B, samples []float64, unit float64) {
		size := 0
		for b.Loop() {
			data, _ := EncodeSamples(samples, unit)
			size = len(data)
		}
		b.ReportMetric(float64(size)/float64(len(samples)), "bytes/sample")
	})
}

func BenchmarkDecodeSamples(b *testing.B) {
	benchmarkSeries(b, func(b *testing.B, samples []float64, unit float64) {
		data, digest := EncodeSamples(samples, unit)
		for b.Loop() {
			if _, err := DecodeSamples(data, len(samples), digest); err != nil {
				b.Fatal(err)
			}
		}
	})
}
