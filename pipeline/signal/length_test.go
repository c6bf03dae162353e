package signal

import (
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// TestFastLength asks for lengths just below products of 2, 3 and 5 with many factors:
// gonum panics where one has more than it has room for.
func TestFastLength(t *testing.T) {
	for _, c := range []struct{ n, want int }{{0, 1}, {1, 1}, {7, 8}, {11, 12}, {17, 18}, {1001, 1024}, {4097, 4320}, {2 * 1594323, 3200000}} {
		if got := FastLength(c.n); got != c.want {
			t.Errorf("FastLength(%d) = %d, want %d", c.n, got, c.want)
		}
	}
	full, tooMany := 0, 0
	for _, n := range products(1 << 23) {
		switch factors, _ := smooth(n); {
		case factors > mostFactors:
			tooMany++
			if got := FastLength(n); got == n {
				t.Errorf("FastLength(%d) is itself, with %d factors", n, factors)
			}
		case FastLength(n) != n:
			t.Errorf("FastLength(%d) = %d", n, FastLength(n))
		case factors == mostFactors && full < 4:
			full++
			fourier.NewFFT(n)
		}
	}
	if full == 0 || tooMany == 0 {
		t.Errorf("%d lengths with the most factors, %d with more", full, tooMany)
	}
}

// products are those of powers of 2, 3 and 5 up to a limit.
func products(limit int) (out []int) {
	for a := 1; a <= limit; a *= 2 {
		for b := a; b <= limit; b *= 3 {
			for c := b; c <= limit; c *= 5 {
				out = append(out, c)
			}
		}
	}
	return out
}

// TestLengthToResample takes factors, primes above 5 among them.
func TestLengthToResample(t *testing.T) {
	for _, factor := range []int{2, 3, 7} {
		n := fastLength(3_100_000, factor)
		if factors, _ := smooth(n * factor); factors > mostFactors {
			t.Errorf("length %d, factor %d: %d factors", n, factor, factors)
		}
		fourier.NewFFT(n * factor)
	}
}
