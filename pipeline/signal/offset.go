package signal

import "math"

// Offset is a step of the baseline: from TimeS after the first sample on, in s, the
// acceleration is too great by Size, in its own unit.
type Offset struct {
	Size, TimeS float64
	// Gain is by what factor the step lessens the squares of the velocity, where the ground
	// is at rest, that a parabola alone would leave.
	Gain float64
	// OverSmooth is by what factor it does so beside a polynomial of as many coefficients, which
	// changes slowly.
	OverSmooth float64
	// Velocity is the greatest one that the step makes where the ground is at rest behind the
	// motion, and Peak that of the motion beside the parabola's, both in units of acceleration
	// times s.
	Velocity, Peak float64
}

// offsetTerms are the three coefficients of the velocity's polynomial, and the two of a
// step behind them.
const offsetTerms = 5

// FindOffset looks for one step of the baseline between the samples quiet and rest, before
// and from which on the ground is at rest. There the velocity, which is integrated from
// the first sample, is that of the baseline alone, taken as a parabola and a step:
//
//	v(t) = c0·t + c1·t²/2 + c2·t³/6        before the motion,
//	v(t) = … + Size·(t - TimeS)             behind it,
//
// which is linear in c0, c1, c2, Size and Size·TimeS, and is fitted by least squares. ok is
// false where the parts are too short to tell, of which o is zero, or where the step would
// be outside the motion between them.
//
// Source: D. M. Boore, Effect of baseline corrections on displacements and response spectra
// for several recordings of the 1999 Chi-Chi, Taiwan, earthquake, BSSA 91(5), 2001, for a
// step that begins where the line through the velocity behind the motion is 0 (from
// memory); the parabola beside it, so that a slow drift is no step, is ours.
func FindOffset(x []float64, stepS float64, quiet, rest int) (o Offset, ok bool) {
	n := len(x)
	if quiet < 2*offsetTerms || n-rest < 2*offsetTerms || rest <= quiet {
		return o, false
	}
	v := Integrate(nil, x, stepS)
	var f, slow fit
	for i, y := range v {
		if i < quiet || i >= rest {
			terms := termsAt(i, n, i >= rest)
			f.add(terms, y)
			slow.add(slowTerms(terms), y)
		}
	}
	with, leftWith, okWith := f.solve(offsetTerms)
	_, left, okWithout := f.solve(offsetTerms - 2)
	_, leftSlow, okSlow := slow.solve(offsetTerms)
	if !okWith || !okWithout || !okSlow || with[3] == 0 {
		return o, false
	}
	lengthS := float64(n) * stepS
	o = Offset{Size: with[3] / lengthS, TimeS: with[4] / with[3] * lengthS, Gain: left / leftWith, OverSmooth: leftSlow / leftWith}
	o.Velocity = max(math.Abs(float64(with[3]*termsAt(rest, n, true)[3])-with[4]), math.Abs(float64(with[3]*termsAt(n-1, n, true)[3])-with[4]))
	for i := quiet; i < rest; i++ {
		y := v[i]
		for k, term := range termsAt(i, n, false) {
			y -= float64(with[k] * term)
		}
		o.Peak = max(o.Peak, math.Abs(y))
	}
	return o, o.TimeS >= float64(quiet)*stepS && o.TimeS <= float64(rest)*stepS
}

// termsAt are what the coefficients are multiplied by at the sample i of n. Time counts in
// lengths of the record, so that sums of squares are of one size.
func termsAt(i, n int, behind bool) (terms [offsetTerms]float64) {
	t := float64(i) / float64(n)
	terms[0], terms[1], terms[2] = t, float64(t*t), float64(float64(t*t)*t)
	if behind {
		terms[3], terms[4] = t, -1
	}
	return terms
}

// slowTerms are those of a polynomial for those with a step.
func slowTerms(terms [offsetTerms]float64) [offsetTerms]float64 {
	t, cubed := terms[0], terms[2]
	terms[3], terms[4] = float64(cubed*t), float64(cubed*terms[1])
	return terms
}

// fit has the normal equations of a least-squares fit.
type fit struct {
	products [offsetTerms][offsetTerms]float64
	right    [offsetTerms]float64
	squares  float64
}

func (f *fit) add(terms [offsetTerms]float64, y float64) {
	for i, a := range terms {
		for j, b := range terms {
			f.products[i][j] += float64(a * b)
		}
		f.right[i] += float64(a * y)
	}
	f.squares += float64(y * y)
}

// solve gives the coefficients of the first n terms and the sum of squares that they
// leave, by Cholesky's decomposition; ok is false where the terms are too much alike.
//
// Source: G. H. Golub and C. F. Van Loan, Matrix Computations, 4th ed., section 4.2 (from
// memory).
func (f *fit) solve(n int) (x [offsetTerms]float64, left float64, ok bool) {
	const alike = 1e-12 // of the product that a term would leave of itself
	var l [offsetTerms][offsetTerms]float64
	left = f.squares
	for i := range n {
		for j := range i + 1 {
			sum := f.products[i][j]
			for k := range j {
				sum -= float64(l[i][k] * l[j][k])
			}
			if i > j {
				l[i][j] = sum / l[j][j]
				continue
			}
			if !(sum > alike*f.products[i][i]) {
				return x, 0, false
			}
			l[i][i] = math.Sqrt(sum)
		}
		sum := f.right[i]
		for k := range i {
			sum -= float64(l[i][k] * x[k])
		}
		x[i] = sum / l[i][i]
		left -= float64(x[i] * x[i])
	}
	for i := n - 1; i >= 0; i-- {
		for k := i + 1; k < n; k++ {
			x[i] -= float64(l[k][i] * x[k])
		}
		x[i] /= l[i][i]
	}
	return x, max(left, 0), true
}
