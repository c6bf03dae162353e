package db

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// motion is seeded noise under an envelope, written with so many decimals in a
// unit as a text record would, and read back.
func motion(n, decimals int, unit float64) []float64 {
	rng := rand.New(rand.NewPCG(11, 7))
	xs := make([]float64, n)
	for i := range xs {
		t := float64(i) / float64(n)
		text := strconv.FormatFloat(100*t*math.Exp(-5*t)*rng.NormFloat64(), 'f', decimals, 64)
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
		{"negative zero", []float64{0, math.Copysign(0, -1), 1}, 1, layoutPlanes},
		{"zeros", make([]float64, 50), 0.01, layoutDecimal},
		{"whole numbers after decimals", []float64{0.001, 9.1e12, -9.1e12}, 1, layoutPlanes},
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

// The decimal layout exists to be smaller: a third of the raw doubles at most.
func TestDecimalLayoutIsSmall(t *testing.T) {
	samples := motion(8000, 6, 0.01)
	data, _ := EncodeSamples(samples, 0.01)
	if raw := 8 * len(samples); len(data) > raw/2 {
		t.Errorf("%d bytes for %d raw", len(data), raw)
	} else {
		t.Logf("%d bytes for %d raw", len(data), raw)
	}
}

func TestDecodeSamplesRefusesDamage(t *testing.T) {
	samples := motion(300, 4, 1)
	data, digest := EncodeSamples(samples, 1)
	damaged := map[string]struct {
		data []byte
		n    int
		sum  string
	}{
		"empty":          {nil, 300, digest},
		"unknown layout": {append([]byte{9}, data[1:]...), 300, digest},
		"cut":            {data[:len(data)/2], 300, digest},
		"head only":      {data[:4], 300, digest},
		"too few":        {data, 299, digest},
		"too many":       {data, 301, digest},
		"huge count":     {data, 1 << 40, digest},
		"other digest":   {data, 300, "00"},
		"other scale":    {append([]byte{data[0], data[1] + 1}, data[2:]...), 300, digest},
	}
	for name, d := range damaged {
		if _, err := DecodeSamples(d.data, d.n, d.sum); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

func FuzzDecodeSamples(f *testing.F) {
	data, _ := EncodeSamples(motion(50, 3, 1), 1)
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

func TestOrdinatesRoundTrip(t *testing.T) {
	values := []float64{0, 1, 0.1, 1.0 / 3, 1e-12, 123.456, 5e-324, math.MaxFloat64, math.SmallestNonzeroFloat64, -2.5e-308}
	text := encodeOrdinates(nil, values)
	if len(text) != ordinateWidth*len(values) {
		t.Fatalf("%d bytes, want %d", len(text), ordinateWidth*len(values))
	}
	got := make([]float64, len(values))
	if err := decodeOrdinates(got, text); err != nil {
		t.Fatal(err)
	}
	for i := range values {
		if got[i] != values[i] {
			t.Errorf("value %d = %v, want %v", i, got[i], values[i])
		}
	}
	if err := decodeOrdinates(got, text[1:]); err == nil {
		t.Error("no error for a short spectrum")
	}
	text[5] = 'x'
	if err := decodeOrdinates(got, text); err == nil {
		t.Error("no error for a damaged spectrum")
	}
}

// Every double comes back, whatever its size and digits.
func TestOrdinatesOfAllSizesRoundTrip(t *testing.T) {
	const seed = 5
	rng := rand.New(rand.NewPCG(seed, 1))
	values := make([]float64, 1000)
	got := make([]float64, len(values))
	for round := range 300 {
		for i := range values {
			switch bits := rng.Uint64(); i % 4 {
			case 0: // any double
				values[i] = math.Float64frombits(bits)
			case 1: // of the size of spectra
				values[i] = math.Exp(60*rng.Float64() - 55)
			case 2: // next to a power of two
				values[i] = math.Float64frombits(uint64(900+bits%200)<<52 - 2 + bits>>40%4)
			case 3: // next to a power of ten
				values[i] = math.Nextafter(math.Pow10(int(bits%60)-50), float64(bits%2))
			}
			if math.IsNaN(values[i]) || math.IsInf(values[i], 0) {
				values[i] = 0
			}
		}
		if err := decodeOrdinates(got, encodeOrdinates(nil, values)); err != nil {
			t.Fatalf("seed %d, round %d: %v", seed, round, err)
		}
		for i, x := range values {
			if math.Float64bits(got[i]) != math.Float64bits(x) {
				t.Fatalf("seed %d, round %d: %v comes back as %v", seed, round, x, got[i])
			}
		}
	}
}

func BenchmarkEncodeSamples(b *testing.B) {
	samples := motion(8000, 6, 0.01)
	b.SetBytes(int64(8 * len(samples)))
	for b.Loop() {
		EncodeSamples(samples, 0.01)
	}
}

func BenchmarkDecodeOrdinates(b *testing.B) {
	values := make([]float64, 251)
	for i := range values {
		values[i] = math.Exp(-float64(i) / 17)
	}
	text := encodeOrdinates(nil, values)
	b.SetBytes(int64(8 * len(values)))
	for b.Loop() {
		if err := decodeOrdinates(values, text); err != nil {
			b.Fatal(err)
		}
	}
}
