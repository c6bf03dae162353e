package geodesy

import "math"

// The three integrals along the arc σ of the auxiliary sphere are
//
//	I1(σ) = ∫ √(1 + k²·sin²σ′) dσ′                          length over b
//	I2(σ) = ∫ 1/√(1 + k²·sin²σ′) dσ′                        with I1, reduced length
//	I3(σ) = ∫ (2 − f)/(1 + (1 − f)·√(1 + k²·sin²σ′)) dσ′    longitude against ω
//
// from 0 to σ, with k = e′·cos α0: Karney (2013), equations 7, 41 and 8. Each is
//
//	I(σ) = A·(σ + Σ C[l]·sin 2lσ),
//
// A and C[l] polynomials in ε = (√(1 + k²) − 1)/(√(1 + k²) + 1), at most 1.7e-3 on
// the Earth, and in n = f/(2 − f). The coefficients, which the paper has too, are
// derived in testdata/reference/geodesy_series.py; the terms left out are of order
// ε⁷, 4e-20 of the whole, and for I3, which f multiplies, of order 6 in ε and n.

const order = 6

// sines is a series of sines of even multiples: sines[l] goes with sin 2(l+1)σ.
type sines [order]float64

// at sums the series at σ by Clenshaw's recurrence.
func (c *sines) at(sigma direction) float64 {
	twoCos := 2 * (float64(sigma.cos*sigma.cos) - float64(sigma.sin*sigma.sin))
	var next, after float64
	for l := order - 1; l >= 0; l-- {
		next, after = c[l]+float64(twoCos*next)-after, next
	}
	return float64(2 * sigma.sin * sigma.cos * next)
}

// between returns the difference of the series from σ1 to σ2.
func (c *sines) between(sigma1, sigma2 direction) float64 { return c.at(sigma2) - c.at(sigma1) }

// polynomial returns Σ c[i]·x^i.
func polynomial(x float64, c ...float64) float64 {
	sum := 0.0
	for i := len(c) - 1; i >= 0; i-- {
		sum = c[i] + float64(sum*x)
	}
	return sum
}

// times multiplies the l-th term of a series by ε^l.
func (c sines) times(epsilon float64) sines {
	power := 1.0
	for l := range c {
		power *= epsilon
		c[l] *= power
	}
	return c
}

// smallParameter returns ε of k².
func smallParameter(k2 float64) float64 {
	root := 1 + math.Sqrt(1+k2)
	return k2 / float64(root*root)
}

// lengthSeries returns A and C of I1.
func lengthSeries(epsilon float64) (float64, sines) {
	e2 := epsilon * epsilon
	a := polynomial(e2, 1, 1.0/4, 1.0/64, 1.0/256) / (1 - epsilon)
	return a, sines{
		polynomial(e2, -1.0/2, 3.0/16, -1.0/32),
		polynomial(e2, -1.0/16, 1.0/32, -9.0/2048),
		polynomial(e2, -1.0/48, 3.0/256),
		polynomial(e2, -5.0/512, 3.0/512),
		-7.0 / 1280,
		-7.0 / 2048,
	}.times(epsilon)
}

// inverseSeries returns A and C of I2.
func inverseSeries(epsilon float64) (float64, sines) {
	e2 := epsilon * epsilon
	a := polynomial(e2, 1, 1.0/4, 9.0/64, 25.0/256) * (1 - epsilon)
	return a, sines{
		polynomial(e2, 1.0/2, 1.0/16, 1.0/32),
		polynomial(e2, 3.0/16, 1.0/32, 35.0/2048),
		polynomial(e2, 5.0/48, 5.0/256),
		polynomial(e2, 35.0/512, 7.0/512),
		63.0 / 1280,
		77.0 / 2048,
	}.times(epsilon)
}

// longitudeSeries holds A and C of I3 for an ellipsoid: polynomials in ε, from
// those of A the constant term on, from those of C[l] the term of ε^(l+1).
type longitudeSeries struct {
	a [order]float64
	c [order - 1][]float64
}

func newLongitudeSeries(n float64) longitudeSeries {
	return longitudeSeries{
		a: [order]float64{
			1,
			polynomial(n, -1.0/2, 1.0/2),
			polynomial(n, -1.0/4, -1.0/8, 3.0/8),
			polynomial(n, -1.0/16, -3.0/16, -1.0/16),
			polynomial(n, -3.0/64, -1.0/32),
			-3.0 / 128,
		},
		c: [order - 1][]float64{
			{
				polynomial(n, 1.0/4, -1.0/4),
				polynomial(n, 1.0/8, 0, -1.0/8),
				polynomial(n, 3.0/64, 3.0/64, -1.0/64),
				polynomial(n, 5.0/128, 1.0/64),
				3.0 / 128,
			},
			{
				polynomial(n, 1.0/16, -3.0/32, 1.0/32),
				polynomial(n, 3.0/64, -1.0/32, -3.0/64),
				polynomial(n, 3.0/128, 1.0/128),
				5.0 / 256,
			},
			{
				polynomial(n, 5.0/192, -3.0/64, 5.0/192),
				polynomial(n, 3.0/128, -5.0/192),
				7.0 / 512,
			},
			{
				polynomial(n, 7.0/512, -7.0/256),
				7.0 / 512,
			},
			{21.0 / 2560},
		},
	}
}

// at returns A and C for a line.
func (s *longitudeSeries) at(epsilon float64) (float64, sines) {
	var c sines
	for l := range s.c {
		c[l] = polynomial(epsilon, s.c[l]...)
	}
	return polynomial(epsilon, s.a[:]...), c.times(epsilon)
}
