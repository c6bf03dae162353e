package spectrum

import (
	"math"
	"math/big"
	"testing"
)

// relative returns |got − want| over the greater of |want| and floor.
func relative(got float64, want *big.Float, floor float64) float64 {
	diff, _ := bsub(bigf(got), want).Float64()
	w, _ := want.Float64()
	return math.Abs(diff) / max(math.Abs(w), floor)
}

// coefficientErrors compares every coefficient of one oscillator with multiple
// precision. Errors are relative to the coefficient itself, except near its
// zeros: below 1e-3 of its envelope they are relative to that.
func coefficientErrors(phase, damping float64) map[string]float64 {
	r := respond(phase, damping)
	got, eq := r.recurrence(), r.difference()
	s := newOracleStep(bigf(phase), bigf(damping))
	one := bigf(1)
	det := bsub(bmul(s.a11, s.a22), bmul(s.a12, s.a21))
	stiffness := badd(bsub(bsub(one, s.a11), s.a22), det)
	middle := bsub(badd(s.pu, bmul(s.a12, s.qv)), bmul(s.a22, s.qu))
	oldest := bsub(bmul(s.a12, s.pv), bmul(s.a22, s.pu))
	p := max(phase, 1)
	errs := map[string]float64{
		"uu": relative(got.uu, bsub(s.a11, one), 0),
		"uv": relative(got.uv, s.a12, 1e-3/p),
		"vu": relative(got.vu, s.a21, 1e-3*min(p, phase*phase)),
		"vv": relative(got.vv, bsub(s.a22, one), 1e-3*min(1, phase*phase)),
		"pu": relative(got.pu, s.pu, 1e-3/(p*p)),
		"qu": relative(got.qu, s.qu, 1e-3/(p*p)),
		"pv": relative(got.pv, s.pv, 1e-3/(p*p)),
		"qv": relative(got.qv, s.qv, 1e-3/(p*p)),
		// Without damping the loss is 0, which 448 bits miss by 1e-134.
		"loss":      relative(eq.loss, bsub(one, det), 1e-100),
		"stiffness": relative(eq.stiffness, stiffness, 0),
		"scale":     relative(eq.scale, s.qu, 1e-3/(p*p)),
	}
	// The slow form alone uses these two; at great phases they may be zero.
	if _, _, slow := bounds(phase, damping); slow {
		errs["middle"] = relative(eq.middle, bquo(middle, s.qu), 0)
		errs["oldest"] = relative(eq.oldest, bquo(oldest, s.qu), 0)
	}
	return errs
}

// TestCoefficients holds the coefficients to 2e-15 of multiple precision over
// phases from far below to far above what records ask for.
func TestCoefficients(t *testing.T) {
	phases := []float64{1e-9, 1e-7, 1e-5, 1e-4, 1e-3, 0.01, 0.1, 0.2499, 0.25, 0.2501, 0.5, 1, 1.2, 1.5,
		2, 3, 3.14159, 3.1416, 4, 5, 6.2831853, 8, 12.5, 20, 31.4, 50, 100, 628.3, 6283}
	dampings := []float64{0, 1e-12, 1e-6, 0.001, 0.02, 0.05, 0.1, 0.2, 0.5, 0.7, 0.9, 0.99}
	worst := map[string]float64{}
	for _, phase := range phases {
		for _, damping := range dampings {
			for name, e := range coefficientErrors(phase, damping) {
				if !(e <= 2e-15) {
					t.Errorf("phase %g damping %g: %s is off by %.2g", phase, damping, name, e)
				}
				worst[name] = max(worst[name], e)
			}
		}
	}
	t.Logf("greatest errors: %v", worst)
}

// TestNewmarkForms checks that the difference equations of Newmark's methods are
// their recurrences with the velocity eliminated.
func TestNewmarkForms(t *testing.T) {
	for _, m := range newmarkMethods {
		for _, phase := range []float64{0.01, 0.3, 2, 3.46, 30} {
			for _, damping := range []float64{0, 0.05, 0.9} {
				checkForms(t, m, phase, damping)
			}
		}
	}
}

func checkForms(t *testing.T, m Method, phase, damping float64) {
	t.Helper()
	s, d := m.newmark(phase, damping)
	det := (1+s.uu)*(1+s.vv) - s.uv*s.vu
	trace := 2 + s.uu + s.vv
	middle := s.pu + s.uv*s.qv - (1+s.vv)*s.qu
	oldest := s.uv*s.pv - (1+s.vv)*s.pu
	for name, pair := range map[string][2]float64{
		"loss":      {d.loss, 1 - det},
		"stiffness": {d.stiffness, 1 - trace + det},
		"middle":    {d.middle, middle / s.qu},
		"oldest":    {d.oldest, oldest / s.qu},
	} {
		if math.Abs(pair[0]-pair[1]) > 1e-13 {
			t.Errorf("%v phase %g damping %g: %s = %v, recurrence has %v", m, phase, damping, name, pair[0], pair[1])
		}
	}
}
