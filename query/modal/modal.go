package modal

import "math"

// Coefficient returns the correlation of the responses of two oscillators of
// periods in s and damping ratios to white noise,
//
//	ρ = 8·√(ζi·ζj)·(r·ζi + ζj)·r^(3/2) / ((1-r²)² + 4·ζi·ζj·r·(1+r²) + 4·(ζi² + ζj²)·r²),
//
// where r = ωi/ωj = Tj/Ti and mode i is the one of the longer period, so that
// both orders of the modes give the same bits. It lies within 0 and 1.
//
// It is 1 for modes of one period and one damping, undamped ones too, and 0
// for an undamped mode and any other: that is never at rest, and its response
// to white noise has no bound. It is NaN where a period is not positive and
// finite or a damping is negative or not finite. The relative error is
// below 2⁻⁴⁹ for dampings from 1e-140 on.
//
// Source: A. Der Kiureghian, "A response spectrum method for random vibration
// analysis of MDF systems", Earthquake Engineering and Structural Dynamics 9
// (1981) 419–435, the correlation of displacements under white noise. There r
// stands for ωj/ωi, which exchanges the factors of ζi and ζj.
func Coefficient(periodI, dampingI, periodJ, dampingJ float64) float64 {
	if !isPeriod(periodI) || !isPeriod(periodJ) || !isDamping(dampingI) || !isDamping(dampingJ) {
		return math.NaN()
	}
	if periodI == periodJ && dampingI == dampingJ {
		return 1
	}
	if periodI < periodJ {
		periodI, dampingI, periodJ, dampingJ = periodJ, dampingJ, periodI, dampingI
	}
	r := periodJ / periodI
	product := dampingI * dampingJ
	squares := float64(dampingI*dampingI) + float64(dampingJ*dampingJ)
	apart := (periodI - periodJ) / periodI * (1 + r) // 1 - r would lose digits where r is near 1
	above := 8 * math.Sqrt(product) * (float64(r*dampingI) + dampingJ) * r * math.Sqrt(r)
	below := float64(apart*apart) + float64(4*product*r*(1+float64(r*r))) + float64(4*squares*r*r)
	if above == 0 { // below may be, too
		return 0
	}
	return min(above/below, 1)
}

func isPeriod(x float64) bool { return x > 0 && !math.IsInf(x, 1) }

func isDamping(x float64) bool { return x >= 0 && !math.IsInf(x, 1) }

// Matrix holds the correlations of a number of modes with each other. The zero
// value is of no mode.
type Matrix struct {
	n       int
	doubled []float64 // 2ρ of the modes i < j, row by row
}

// Correlation returns the correlations of modes of periods in s and damping
// ratios, as Coefficient has them. It panics if the lengths differ. For n modes
// it costs n²/2 coefficients, once for a structure.
func Correlation(periods, dampings []float64) Matrix {
	n := len(periods)
	if len(dampings) != n {
		panic("modal: as many dampings as periods are needed")
	}
	m := Matrix{n: n, doubled: make([]float64, 0, n*(n-1)/2)}
	for i := range periods {
		for j := i + 1; j < n; j++ {
			m.doubled = append(m.doubled, 2*Coefficient(periods[i], dampings[i], periods[j], dampings[j]))
		}
	}
	return m
}

// Len is the number of modes.
func (m Matrix) Len() int { return m.n }

// At returns the correlation of modes i and j, which count from 0; of a mode
// with itself it is 1. It panics if there is no such mode.
func (m Matrix) At(i, j int) float64 {
	if min(i, j) < 0 || max(i, j) >= m.n {
		panic("modal: no such mode")
	}
	if i == j {
		return 1
	}
	i, j = min(i, j), max(i, j)
	return m.doubled[i*(2*m.n-i-1)/2+j-i-1] / 2
}

// SRSS returns the square root of the sum of squares
//
//	√(Σ x[i]²)
//
// of the peaks of modes, of any sign, in their unit. It suits modes whose
// frequencies lie far apart. No mode gives 0; NaN propagates; squares may
// overflow from 1e154 on. No allocation.
//
// Source: E. Rosenblueth, "A basis for aseismic design", doctoral thesis,
// University of Illinois, 1951 (from memory).
func SRSS(values []float64) float64 {
	var sum float64
	for _, x := range values {
		sum += float64(x * x)
	}
	return math.Sqrt(sum)
}

// CQC returns the complete quadratic combination
//
//	√(Σi Σj ρ[i,j]·x[i]·x[j])
//
// of the peaks of modes, in their unit. Values bear the sign of what the mode
// adds to the quantity, that of participation factor times shape: base shears
// and moments of classically damped modes on one base have one sign. It panics
// unless there is one value a mode.
//
// The sum is never negative; where rounding makes it so, as for two opposite
// values of modes that hardly differ, the result is 0. No mode gives 0; NaN
// propagates; squares may overflow from 1e154 on. It costs n²/2 multiplications
// and additions, no allocation.
//
// Source: A. Der Kiureghian 1981, as for Coefficient; E. L. Wilson,
// A. Der Kiureghian, E. P. Bayo, "A replacement for the SRSS method in seismic
// analysis", Earthquake Engineering and Structural Dynamics 9 (1981) 187–192.
func CQC(values []float64, rho Matrix) float64 {
	if len(values) != rho.n {
		panic("modal: as many values as modes are needed")
	}
	var sum float64
	at := 0
	for i, x := range values {
		with := x
		for _, y := range values[i+1:] {
			with += float64(rho.doubled[at] * y)
			at++
		}
		sum += float64(x * with)
	}
	if sum <= 0 {
		return 0
	}
	return math.Sqrt(sum)
}
