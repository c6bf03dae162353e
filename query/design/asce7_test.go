package design

import (
	"fmt"
	"math"
	"testing"
)

// 11.4.6 by hand: 0.4·SDS at 0, SDS from T0 = 0.2·SD1/SDS to TS = SD1/SDS, SD1/T
// to TL, SD1·TL/T² beyond.
func TestASCE7(t *testing.T) {
	for _, c := range []struct{ sds, sd1, tl float64 }{{1, 0.6, 8}, {0.33, 0.133, 12}, {0.8, 0.9, 4}} {
		s := parsed(t, fmt.Sprintf("kind = 'asce7'\nsds_g = %v\nsd1_g = %v\ntl_s = %v", c.sds, c.sd1, c.tl))
		ts := c.sd1 / c.sds
		for _, p := range []struct{ period, want float64 }{
			{0, 0.4 * c.sds}, {0.1 * ts, 0.7 * c.sds}, {0.2 * ts, c.sds}, {0.6 * ts, c.sds}, {ts, c.sds},
			{2 * ts, c.sds / 2}, {3, c.sd1 / 3}, {c.tl, c.sd1 / c.tl}, {2 * c.tl, c.sd1 / c.tl / 4},
		} {
			if got := s.PSAg(p.period, 0.05); !near(got, p.want, 4e-15) {
				t.Errorf("%+v at %v s: %v, want %v", c, p.period, got, p.want)
			}
		}
		checkContinuous(t, s, 0.2*ts, ts, c.tl)
		if got := s.PSAg(1, 0.02); !math.IsNaN(got) {
			t.Errorf("damping 2 %%: %v, want NaN", got)
		}
		if ratio, fixed := s.Damping(); ratio != 0.05 || !fixed {
			t.Errorf("damping %v, fixed %v", ratio, fixed)
		}
		if from, to := s.Band(); from != 0 || !math.IsInf(to, 1) {
			t.Errorf("band %v to %v s", from, to)
		}
		if got := s.PSAg(math.Inf(1), 0.05); !math.IsNaN(got) {
			t.Errorf("infinite period: %v, want NaN", got)
		}
	}
}

// Who asks for it has the whole spectrum scaled by η(ξ)/η(ξ0).
func TestScaledByEta(t *testing.T) {
	s := parsed(t, "kind = 'asce7'\nsds_g = 1\nsd1_g = 0.6\ntl_s = 8\neta = 'en1998'")
	for _, period := range []float64{0, 0.05, 0.3, 2, 12} {
		if got, want := s.PSAg(period, 0.10), math.Sqrt(2./3)*s.PSAg(period, 0.05); !near(got, want, 1e-15) {
			t.Errorf("%v s: %v, want %v", period, got, want)
		}
	}
	if _, fixed := s.Damping(); fixed || len(s.Notes()) != 1 {
		t.Errorf("fixed %v, notes %q", fixed, s.Notes())
	}
}
