package design

import (
	"fmt"
	"math"
)

// Eta returns the factor
//
//	η = √(10/(5+ξ)) ≥ 0.55
//
// by which EN 1998-1:2004, 3.2.2.2(3), expression (3.6), takes elastic ordinates
// of 5 % damping to the damping ratio ξ/100. It is 1 at 0.05 and reaches its
// bound at 0.2806. The standard sets no bound for small dampings; at 0 it is √2.
// For a ratio that is negative or no number it is NaN.
func Eta(damping float64) float64 {
	if !(damping >= 0) {
		return math.NaN()
	}
	return max(math.Sqrt(0.1/(0.05+damping)), 0.55)
}

// en1998 is the elastic spectrum of EN 1998-1:2004, with a the ground
// acceleration ag·S and k = 2.5 of 3.2.2.2, expressions (3.2) to (3.5), or avg
// and 3.0 of 3.2.2.3, expressions (3.8) to (3.11):
//
//	T ≤ TB:       a·(1 + T/TB·(η·k - 1))
//	TB ≤ T ≤ TC:  a·η·k
//	TC ≤ T ≤ TD:  a·η·k·TC/T
//	TD ≤ T ≤ 4 s: a·η·k·TC·TD/T²
//
// Where TE and TF are known the last branch goes on to TE, and from there Annex
// A, expressions (A.1) and (A.2), gives the displacement, which is dg from TF on:
//
//	SD = 0.025·a·TC·TD·(k·η + (T-TE)/(TF-TE)·(1 - k·η))
//
// The standard rounds 1/4π² to 0.025, so there is a step down of 1.3 % at TE.
type en1998 struct {
	a, amplification       float64 // g, none
	tb, tc, td, te, tf, to float64 // s; te and tf are 0 where they are not known
}

// lastPeriodS is where 3.2.2.2 and 3.2.2.3 end.
const lastPeriodS = 4

func (e en1998) bandS() (from, to float64) { return 0, e.to }

func (e en1998) psaG(t, eta float64) float64 {
	k := float64(eta * e.amplification)
	switch {
	case t < e.tb:
		return e.a * (1 + float64(t/e.tb*(k-1)))
	case t <= e.tc:
		return e.a * k
	case t <= e.td:
		return e.a * k * (e.tc / t)
	case e.te == 0 || t <= e.te:
		return e.a * k * (e.tc / t) * (e.td / t)
	}
	share := min((t-e.te)/(e.tf-e.te), 1)
	omega := 2 * math.Pi / t
	return 0.025 * e.a * e.tc * e.td * (k + float64(share*(1-k))) * omega * omega
}

// corners are the parameters of one ground type: S, TB, TC and TD.
type corners struct{ s, tb, tc, td float64 }

// grounds are the recommended parameters of horizontal spectra, of type 1 and
// type 2, by ground type.
//
// Source: EN 1998-1:2004, Tables 3.2 and 3.3 (from memory).
var grounds = [2]map[string]corners{
	{
		"A": {1.0, 0.15, 0.4, 2.0},
		"B": {1.2, 0.15, 0.5, 2.0},
		"C": {1.15, 0.20, 0.6, 2.0},
		"D": {1.35, 0.20, 0.8, 2.0},
		"E": {1.4, 0.15, 0.5, 2.0},
	},
	{
		"A": {1.0, 0.05, 0.25, 1.2},
		"B": {1.35, 0.05, 0.25, 1.2},
		"C": {1.5, 0.10, 0.25, 1.2},
		"D": {1.8, 0.10, 0.30, 1.2},
		"E": {1.6, 0.05, 0.25, 1.2},
	},
}

// longPeriods are TE and TF of type 1, by ground type.
//
// Source: EN 1998-1:2004, Annex A, Table A.1 (from memory).
var longPeriods = map[string][2]float64{"A": {4.5, 10}, "B": {5, 10}, "C": {6, 10}, "D": {6, 10}, "E": {6, 10}}

// verticalShares are avg/ag of the recommended vertical spectra of type 1 and
// type 2, whose corners are verticalCorners.
//
// Source: EN 1998-1:2004, Table 3.4 (from memory).
var verticalShares = [2]float64{0.90, 0.45}

var verticalCorners = corners{1, 0.05, 0.15, 1.0}

// Ranges within which parameters are taken, ours: beyond them a unit is wrong
// rather than a hazard high.
const (
	leastG, mostG           = 0.001, 5.0
	leastFactor, mostFactor = 0.1, 10.0
	leastCornerS            = 0.001
	mostCornerS             = 100.0
)

// readEN1998 sets the spectrum to what the file asks for.
func (s *Spectrum) readEN1998(k *keys) {
	s.direction = k.word("direction", "horizontal", "horizontal", "vertical")
	if s.IsVertical() {
		s.readVertical(k)
		return
	}
	k.only("name", "kind", "direction", "type", "ground", "parameters", "agr_g", "agr_m_s2", "importance_factor")
	ag := groundAcceleration(k)
	if k.has("parameters") {
		s.readOwnHorizontal(k, ag)
		return
	}
	of, ground := spectrumType(k), k.word("ground", "", "A", "B", "C", "D", "E")
	c := grounds[of-1][ground]
	e := en1998{a: ag * c.s, amplification: 2.5, tb: c.tb, tc: c.tc, td: c.td, to: lastPeriodS}
	if of == 1 {
		e.goOn(longPeriods[ground])
	}
	s.setEN1998(e, fmt.Sprintf("horizontal, type %d, ground %s: ag %s g, S %v", of, ground, figure(ag), c.s))
}

// goOn continues the spectrum by Annex A.
func (e *en1998) goOn(corners [2]float64) {
	e.te, e.tf, e.to = corners[0], corners[1], math.Inf(1)
}

func (s *Spectrum) setEN1998(e en1998, what string) {
	s.shape = e
	s.words = fmt.Sprintf("EN 1998-1:2004 elastic, %s, TB %v s, TC %v s, TD %v s", what, e.tb, e.tc, e.td)
	if e.te > 0 {
		s.words += fmt.Sprintf(", TE %v s, TF %v s", e.te, e.tf)
		s.notes = append(s.notes, "beyond 4 s by Annex A of EN 1998-1, which is informative")
	}
}

func (s *Spectrum) readVertical(k *keys) {
	e := en1998{amplification: 3, to: lastPeriodS}
	if k.has("parameters") {
		k.only("name", "kind", "direction", "parameters", "agr_g", "agr_m_s2", "importance_factor")
		ag, own := groundAcceleration(k), k.table("parameters")
		own.only("vertical_share", "tb_s", "tc_s", "td_s", "amplification")
		e.a = ag * own.number("vertical_share", leastFactor, mostFactor)
		e.readCorners(own)
		s.setEN1998(e, fmt.Sprintf("vertical, own parameters: avg %s g, amplification %v", figure(e.a), e.amplification))
		return
	}
	k.only("name", "kind", "direction", "type", "agr_g", "agr_m_s2", "importance_factor")
	of, c := spectrumType(k), verticalCorners
	e.a = groundAcceleration(k) * verticalShares[of-1]
	e.tb, e.tc, e.td = c.tb, c.tc, c.td
	s.setEN1998(e, fmt.Sprintf("vertical, type %d: avg %s g", of, figure(e.a)))
}

func (s *Spectrum) readOwnHorizontal(k *keys, ag float64) {
	for _, key := range []string{"type", "ground"} {
		if k.has(key) {
			k.fail(key, "not beside parameters, which stand for it")
		}
	}
	own := k.table("parameters")
	own.only("s", "tb_s", "tc_s", "td_s", "te_s", "tf_s", "amplification")
	soil := own.number("s", leastFactor, mostFactor)
	e := en1998{a: ag * soil, amplification: 2.5, to: lastPeriodS}
	e.readCorners(own)
	if own.has("te_s") || own.has("tf_s") {
		te := own.number("te_s", max(e.td, lastPeriodS), mostCornerS)
		tf := own.number("tf_s", leastCornerS, mostCornerS)
		if !(tf > te) {
			own.fail("tf_s", "%v s is not after te_s", tf)
		}
		e.goOn([2]float64{te, tf})
	}
	s.setEN1998(e, fmt.Sprintf("horizontal, own parameters: ag %s g, S %v, amplification %v", figure(ag), soil, e.amplification))
}

// readCorners reads what one's own spectra in both directions have.
func (e *en1998) readCorners(own *keys) {
	e.tb = own.number("tb_s", leastCornerS, mostCornerS)
	e.tc = own.number("tc_s", leastCornerS, mostCornerS)
	e.td = own.number("td_s", leastCornerS, mostCornerS)
	if e.tc < e.tb {
		own.fail("tc_s", "%v s is before tb_s", e.tc)
	}
	if e.td < e.tc {
		own.fail("td_s", "%v s is before tc_s", e.td)
	}
	e.amplification = own.numberOr("amplification", e.amplification, 1, mostFactor)
}

// groundAcceleration returns ag = γI·agR in g.
func groundAcceleration(k *keys) float64 {
	if k.has("agr_g") == k.has("agr_m_s2") {
		k.fail("agr_g", "one of agr_g, in g, and agr_m_s2, in m/s², is needed")
	}
	importance := k.numberOr("importance_factor", 1, leastFactor, mostFactor)
	if k.has("agr_m_s2") {
		return k.number("agr_m_s2", leastG*standardGravity, mostG*standardGravity) / standardGravity * importance
	}
	return k.number("agr_g", leastG, mostG) * importance
}

// spectrumType returns 1 or 2.
func spectrumType(k *keys) int {
	of, ok := k.values["type"].(int64)
	switch {
	case !k.has("type"):
		k.fail("type", "is missing; want 1 or 2")
	case !ok || of != 1 && of != 2:
		k.fail("type", "want 1 or 2, found %s", found(k.values["type"]))
	default:
		return int(of)
	}
	return 1
}

// figure writes a number for people, in four digits.
func figure(x float64) string { return fmt.Sprintf("%.4g", x) }
