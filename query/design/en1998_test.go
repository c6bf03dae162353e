package design

import (
	"errors"
	"fmt"
	"math"
	"testing"
)

// parsed reads a description that names no file.
func parsed(t *testing.T, text string) Spectrum {
	t.Helper()
	s, err := parse("design.toml", []byte(text), noFile)
	if err != nil {
		t.Fatalf("%v in\n%s", err, text)
	}
	return s
}

func noFile(string, int64) ([]byte, error) { return nil, errors.New("no such file") }

// Tables 3.2 and 3.3 as printed, a row a ground type: S, TB, TC, TD; for type 1
// TE and TF of Table A.1 behind them (from memory). Values at the corners follow
// from the expressions by hand.
func TestHorizontalByGround(t *testing.T) {
	for _, c := range []struct {
		of             int
		ground         string
		s, tb, tc, td  float64
		te, tf, damped float64
	}{
		{1, "A", 1.0, 0.15, 0.4, 2.0, 4.5, 10, 0},
		{1, "B", 1.2, 0.15, 0.5, 2.0, 5.0, 10, 0},
		{1, "C", 1.15, 0.20, 0.6, 2.0, 6.0, 10, 0},
		{1, "D", 1.35, 0.20, 0.8, 2.0, 6.0, 10, 0},
		{1, "E", 1.4, 0.15, 0.5, 2.0, 6.0, 10, 0},
		{2, "A", 1.0, 0.05, 0.25, 1.2, 0, 0, 0},
		{2, "B", 1.35, 0.05, 0.25, 1.2, 0, 0, 0},
		{2, "C", 1.5, 0.10, 0.25, 1.2, 0, 0, 0},
		{2, "D", 1.8, 0.10, 0.30, 1.2, 0, 0, 0},
		{2, "E", 1.6, 0.05, 0.25, 1.2, 0, 0, 0},
	} {
		t.Run(fmt.Sprintf("type %d ground %s", c.of, c.ground), func(t *testing.T) {
			s := parsed(t, fmt.Sprintf("kind = 'en1998-1'\ntype = %d\nground = %q\nagr_g = 0.3\nimportance_factor = 1.2", c.of, c.ground))
			const ag = 0.36
			for _, damping := range []float64{0, 0.02, 0.05, 0.10, 0.28, 0.5} {
				plateau := ag * c.s * 2.5 * math.Max(math.Sqrt(10/(5+100*damping)), 0.55)
				for _, p := range []struct{ period, want float64 }{
					{0, ag * c.s},
					{c.tb / 2, (ag*c.s + plateau) / 2},
					{c.tb, plateau},
					{(c.tb + c.tc) / 2, plateau},
					{c.tc, plateau},
					{(c.tc + c.td) / 2, plateau * 2 * c.tc / (c.tc + c.td)},
					{c.td, plateau * c.tc / c.td},
					{3, plateau * c.tc * c.td / 9},
					{4, plateau * c.tc * c.td / 16},
				} {
					if got := s.PSAg(p.period, damping); !near(got, p.want, 4e-15) {
						t.Errorf("%v s, damping %v: %v, want %v", p.period, damping, got, p.want)
					}
				}
				checkBeyond4s(t, s, c.te, c.tf, plateau, 0.025*ag*c.s*c.tc*c.td, c.tc*c.td, damping)
			}
			checkContinuous(t, s, c.tb, c.tc, c.td)
		})
	}
}

// checkBeyond4s compares with Annex A where there is one: the last branch up to
// TE, dg from TF on, half the way between them by displacement.
func checkBeyond4s(t *testing.T, s Spectrum, te, tf, plateau, dg, tcd, damping float64) {
	t.Helper()
	if te == 0 {
		if got := s.PSAg(4.001, damping); !math.IsNaN(got) {
			t.Errorf("beyond 4 s: %v, want NaN", got)
		}
		return
	}
	k := 2.5 * math.Max(math.Sqrt(10/(5+100*damping)), 0.55)
	for _, p := range []struct{ period, want float64 }{
		{te, plateau * tcd / (te * te)},
		{(te + tf) / 2, dg * (k + 1) / 2 * math.Pow(4*math.Pi/(te+tf), 2)},
		{tf, dg * math.Pow(2*math.Pi/tf, 2)},
		{2 * tf, dg * math.Pow(math.Pi/tf, 2)},
	} {
		if got := s.PSAg(p.period, damping); !near(got, p.want, 4e-15) {
			t.Errorf("%v s, damping %v: %v, want %v", p.period, damping, got, p.want)
		}
	}
	// 1/4π² is 1.3 % above the standard's 0.025.
	step := s.PSAg(te*(1+1e-12), damping) / s.PSAg(te, damping)
	if want := 0.025 * 4 * math.Pi * math.Pi; !near(step, want, 1e-10) {
		t.Errorf("step at TE: %v, want %v", step, want)
	}
}

// checkContinuous looks at both sides of each corner.
func checkContinuous(t *testing.T, s Spectrum, corners ...float64) {
	t.Helper()
	damping, _ := s.Damping()
	for _, period := range corners {
		before, at, behind := s.PSAg(period*(1-1e-12), damping), s.PSAg(period, damping), s.PSAg(period*(1+1e-12), damping)
		if !near(before, at, 1e-11) || !near(behind, at, 1e-11) {
			t.Errorf("at %v s: %v, %v, %v", period, before, at, behind)
		}
	}
}

// Table 3.4: avg/ag 0.90 and 0.45, TB 0.05 s, TC 0.15 s, TD 1.0 s; the plateau
// is 3.0 times avg, and no soil factor counts.
func TestVertical(t *testing.T) {
	for of, share := range map[int]float64{1: 0.9, 2: 0.45} {
		s := parsed(t, fmt.Sprintf("kind = 'en1998-1'\ndirection = 'vertical'\ntype = %d\nagr_g = 0.2", of))
		avg := 0.2 * share
		for _, p := range []struct{ period, damping, want float64 }{
			{0, 0.05, avg}, {0.025, 0.05, 2 * avg}, {0.05, 0.05, 3 * avg}, {0.15, 0.05, 3 * avg},
			{0.3, 0.05, 1.5 * avg}, {1, 0.05, 0.45 * avg}, {2, 0.05, 0.1125 * avg}, {4, 0.05, 0.028125 * avg},
			{0.1, 0.10, 3 * math.Sqrt(2./3) * avg}, {0.1, 0.4, 1.65 * avg},
		} {
			if got := s.PSAg(p.period, p.damping); !near(got, p.want, 4e-15) {
				t.Errorf("type %d, %v s, damping %v: %v, want %v", of, p.period, p.damping, got, p.want)
			}
		}
		checkContinuous(t, s, 0.05, 0.15, 1)
		if from, to := s.Band(); from != 0 || to != 4 {
			t.Errorf("type %d: band %v to %v s", of, from, to)
		}
	}
}

// One's own parameters give what a ground type with the same ones gives.
func TestOwnParameters(t *testing.T) {
	const head = "kind = 'en1998-1'\nagr_m_s2 = 1.96133\n"
	for _, c := range []struct{ own, known string }{
		{"parameters = {s = 1.15, tb_s = 0.2, tc_s = 0.6, td_s = 2, te_s = 6, tf_s = 10}", "type = 1\nground = 'C'"},
		{"parameters = {s = 1.8, tb_s = 0.1, tc_s = 0.3, td_s = 1.2, amplification = 2.5}", "type = 2\nground = 'D'"},
		{"direction = 'vertical'\n[parameters]\nvertical_share = 0.9\ntb_s = 0.05\ntc_s = 0.15\ntd_s = 1", "direction = 'vertical'\ntype = 1"},
	} {
		own, known := parsed(t, head+c.own), parsed(t, "kind = 'en1998-1'\nagr_g = 0.2\n"+c.known)
		for period := 0.0; period < 20; period += 0.07 {
			a, b := own.PSAg(period, 0.08), known.PSAg(period, 0.08)
			if !near(a, b, 1e-15) && !(math.IsNaN(a) && math.IsNaN(b)) {
				t.Errorf("%s: %v g at %v s, want %v", c.own, a, period, b)
			}
		}
	}
	s := parsed(t, head+"parameters = {s = 1, tb_s = 0.2, tc_s = 0.6, td_s = 2, amplification = 2.8}")
	if got := s.PSAg(0.4, 0.05); !near(got, 0.2*2.8, 1e-15) {
		t.Errorf("amplification 2.8: %v", got)
	}
	if got := s.PSAg(5, 0.05); !math.IsNaN(got) {
		t.Errorf("5 s without TE and TF: %v, want NaN", got)
	}
}

func TestWordsAndNotesOfEN1998(t *testing.T) {
	s := parsed(t, "kind = 'en1998-1'\ntype = 1\nground = 'C'\nagr_g = 0.2\nimportance_factor = 1.2")
	const want = "EN 1998-1:2004 elastic, horizontal, type 1, ground C: ag 0.24 g, S 1.15, TB 0.2 s, TC 0.6 s, TD 2 s, TE 6 s, TF 10 s"
	if s.Words() != want || len(s.Notes()) != 1 || s.Name() != "design" {
		t.Errorf("%q, %q, %q", s.Name(), s.Words(), s.Notes())
	}
	if ratio, fixed := s.Damping(); ratio != 0.05 || fixed {
		t.Errorf("damping %v, fixed %v", ratio, fixed)
	}
}
