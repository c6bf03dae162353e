package design

import (
	"fmt"
	"math"
)

// asce7 is the design response spectrum of ASCE/SEI 7-16, 11.4.6, for 5 %
// damping, with TS = SD1/SDS and T0 = 0.2·TS:
//
//	T < T0:        SDS·(0.4 + 0.6·T/T0)
//	T0 ≤ T ≤ TS:   SDS
//	TS < T ≤ TL:   SD1/T
//	TL < T:        SD1·TL/T²
type asce7 struct {
	sds, sd1 float64 // g
	tl       float64 // s
}

func (a asce7) bandS() (from, to float64) { return 0, math.Inf(1) }

func (a asce7) psaG(t, eta float64) float64 {
	ts := a.sd1 / a.sds
	t0 := 0.2 * ts
	switch {
	case t < t0:
		return eta * a.sds * (0.4 + float64(0.6*(t/t0)))
	case t <= ts:
		return eta * a.sds
	case t <= a.tl:
		return eta * a.sd1 / t
	}
	return eta * a.sd1 / t * (a.tl / t)
}

func (s *Spectrum) readASCE7(k *keys) {
	k.only("name", "kind", "sds_g", "sd1_g", "tl_s", "eta")
	a := asce7{k.number("sds_g", leastG, mostG), k.number("sd1_g", leastG, mostG), k.number("tl_s", leastCornerS, mostCornerS)}
	if ts := a.sd1 / a.sds; a.tl < ts {
		k.fail("tl_s", "%v s is before SD1/SDS = %s s", a.tl, figure(ts))
	}
	s.shape = a
	s.words = fmt.Sprintf("ASCE/SEI 7-16, 11.4.6: SDS %v g, SD1 %v g, TL %v s", a.sds, a.sd1, a.tl)
	s.scaleByEta(k)
}
