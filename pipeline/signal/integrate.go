package signal

// Integrate sets dst to the running trapezoidal integral of x,
//
//	dst[0] = 0,  dst[i] = dst[i-1] + stepS/2·(x[i-1] + x[i]),
//
// which is exact for what is linear between samples, and returns it. A nil dst is
// allocated; another must have the length of x, or Integrate panics. dst may be x.
// In units of x times s.
//
// Source: NIST Digital Library of Mathematical Functions, section 3.5(i).
func Integrate(dst, x []float64, stepS float64) []float64 {
	if dst == nil {
		dst = make([]float64, len(x))
	}
	if len(dst) != len(x) {
		panic("signal: lengths differ")
	}
	sum, before := 0.0, 0.0
	for i, v := range x {
		if i > 0 {
			sum += float64(stepS / 2 * (before + v))
		}
		before = v
		dst[i] = sum
	}
	return dst
}
