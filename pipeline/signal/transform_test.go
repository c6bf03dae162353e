package signal

import (
	"encoding/binary"
	"hash/fnv"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// noise is invented.
func noise(n int) []float64 {
	rng := rand.New(rand.NewPCG(1, uint64(n)))
	x := make([]float64, n)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	return x
}

// TestTransformByDefinition sums the coefficients as they are defined, of lengths with all
// factors and of some with none below 7.
func TestTransformByDefinition(t *testing.T) {
	for _, n := range []int{2, 4, 6, 8, 10, 12, 14, 16, 18, 20, 22, 24, 30, 32, 50, 60, 64, 90, 98, 128, 150, 270, 286, 360} {
		x := noise(n - n/5)
		got := Transform(x, n)
		if len(got) != n/2+1 {
			t.Fatalf("%d coefficients of %d samples", len(got), n)
		}
		for k, c := range got {
			var want complex128
			for j, v := range x {
				want += complex(v, 0) * cmplx.Rect(1, -2*math.Pi*float64(j*k%n)/float64(n))
			}
			if cmplx.Abs(c-want) > 1e-13*float64(n) {
				t.Errorf("coefficient %d of %d is %v, want %v", k, n, c, want)
			}
		}
	}
}

// TestTransformAgainstGonum takes lengths as records have them, with gonum's transform.
func TestTransformAgainstGonum(t *testing.T) {
	for _, n := range []int{1000, 4096, 8640, 18750, 65536, 100000, 177147 * 2} {
		x := noise(n)
		got, want := Transform(x, n), fourier.NewFFT(n).Coefficients(nil, x)
		for k := range want {
			if off := cmplx.Abs(got[k] - want[k]); off > 1e-14*math.Sqrt(float64(n))*10 {
				t.Fatalf("coefficient %d of %d differs by %g", k, n, off)
			}
		}
		for i, v := range inverse(got) {
			if off := math.Abs(v/float64(n) - x[i]); off > 1e-14 {
				t.Fatalf("sample %d of %d comes back off by %g", i, n, off)
			}
		}
	}
}

// TestTransformSameBits holds a checksum made on amd64 without fused instructions against
// what this machine makes of the same samples.
func TestTransformSameBits(t *testing.T) {
	sum := fnv.New64a()
	for _, n := range []int{1536, 9000, 154} {
		for _, c := range Transform(noise(n), n) {
			sum.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(real(c))))
			sum.Write(binary.LittleEndian.AppendUint64(nil, math.Float64bits(imag(c))))
		}
	}
	const want = 0x8c8d5ab65b1600f3
	if got := sum.Sum64(); got != want {
		t.Errorf("checksum %#x, want %#x", got, uint64(want))
	}
}

func TestTransformRefuses(t *testing.T) {
	for _, c := range [][2]int{{0, 0}, {3, 3}, {5, 4}, {1, 1}} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%d samples at a length of %d do not panic", c[0], c[1])
				}
			}()
			Transform(make([]float64, c[0]), c[1])
		}()
	}
}

// TestFastLength looks for each length's next even product of 2, 3 and 5.
func TestFastLength(t *testing.T) {
	fast := map[int]bool{}
	for a := 2; a <= 1<<14; a *= 2 {
		for b := a; b <= 1<<14; b *= 3 {
			for c := b; c <= 1<<14; c *= 5 {
				fast[c] = true
			}
		}
	}
	want := 1 << 14
	for n := 1 << 14; n >= 0; n-- {
		if fast[n] {
			want = n
		}
		if got := FastLength(n); got != want {
			t.Fatalf("FastLength(%d) = %d, want %d", n, got, want)
		}
	}
}

func BenchmarkTransform(b *testing.B) {
	for _, n := range []int{8640, 32768} {
		b.Run(strconv.Itoa(n), func(b *testing.B) {
			x := noise(n)
			for b.Loop() {
				Transform(x, n)
			}
		})
		b.Run("gonum/"+strconv.Itoa(n), func(b *testing.B) {
			x, f := noise(n), fourier.NewFFT(n)
			for b.Loop() {
				f.Coefficients(nil, x)
			}
		})
	}
}
