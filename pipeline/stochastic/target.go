package stochastic

import "math"

// FourierTarget returns the Fourier amplitude of acceleration, in m/s, that the
// parameters give at frequencyHz ≥ 0:
//
//	Y(f) = C·M0·(2πf)²/(1 + (f/f0)²) · Z(R)·exp(−πfR/(Q(f)·c)) · A(f)·exp(−πκf) · filters,
//	C = RadiationMean·Partition·FreeSurface/(4πρβ³).
//
// It is zero at zero frequency. Y is the amplitude |∫a(t)·exp(−2πift)dt|.
//
// Source: Boore (2003).
func FourierTarget(frequencyHz float64, p Params) float64 {
	t := newTarget(p)
	return t.at(frequencyHz)
}

// target holds what is the same for all frequencies.
type target struct {
	scale     float64 // C·M0·Z(R)·4π², in m·s
	cornerHz  float64
	pathRate  float64 // πR/(Q0·c), in s
	pathPower float64 // 1 − QExponent
	kappaRate float64 // πκ, in s
	vs30      float64
	reference float64
	lowCutHz  float64
	highCutHz float64
	response  func(float64) float64
}

func newTarget(p Params) target {
	s, path := p.Source, p.Path
	moment := Moment(s.Magnitude)
	beta := s.ShearVelocityMPS
	c := RadiationMean * s.Partition * FreeSurface / (4 * math.Pi * s.DensityKGM3 * beta * beta * beta)
	return target{
		scale:     c * moment * Spreading(path) * 4 * math.Pi * math.Pi,
		cornerHz:  CornerFrequency(moment, s.StressDropPa, beta),
		pathRate:  math.Pi * path.DistanceM / (path.Q0 * path.VelocityMPS),
		pathPower: 1 - path.QExponent,
		kappaRate: math.Pi * p.Site.KappaS,
		vs30:      p.Site.Vs30MPS,
		reference: beta,
		lowCutHz:  p.LowCutHz,
		highCutHz: p.HighCutHz,
		response:  p.Response,
	}
}

func (t *target) at(f float64) float64 {
	if f <= 0 {
		return 0
	}
	x := f / t.cornerHz
	y := t.scale * f * f / (1 + float64(x*x))
	y *= math.Exp(-(float64(t.pathRate*math.Pow(f, t.pathPower)) + float64(t.kappaRate*f)))
	y *= Amplification(f, t.vs30, t.reference)
	if t.lowCutHz > 0 {
		y *= butterworth(t.lowCutHz / f)
	}
	if t.highCutHz > 0 {
		y *= butterworth(f / t.highCutHz)
	}
	if t.response != nil {
		y *= t.response(f)
	}
	return y
}

// butterworth returns the amplitude 1/√(1 + r⁴) of a second-order Butterworth
// filter at the ratio r of frequency and corner, or of corner and frequency.
// Second order is the lowest whose low cut leaves the displacement without a
// permanent offset, and the lower the order the shorter the filter rings.
func butterworth(r float64) float64 {
	r2 := r * r
	return 1 / math.Sqrt(1+float64(r2*r2))
}

// Spreading returns the geometric spreading of a path, in 1/m:
//
//	1/R up to the break Rb,  (1/Rb)·(Rb/R)^FarExponent beyond.
//
// Source: Boore (2003), with two segments.
func Spreading(p Path) float64 {
	if p.DistanceM <= p.BreakM {
		return 1 / p.DistanceM
	}
	return math.Pow(p.BreakM/p.DistanceM, p.FarExponent) / p.BreakM
}

// profileExponent is the power p with which the time-averaged velocity of the
// ground grows with depth, V(z) = Vs30·(z/30 m)^p. See Amplification.
const profileExponent = 0.3

// Amplification returns the crustal amplification at frequencyHz > 0 of a site
// with vs30MPS in m/s over rock of referenceMPS in m/s, both without
// attenuation. With a time-averaged velocity V(z) = Vs30·(z/30 m)^0.3 the depth
// of a quarter wavelength is z = V(z)/(4f), hence
//
//	V = Vs30·(Vs30/(120 m·f))^(0.3/0.7),  A(f) = (1 + (reference/V)⁴)^(1/8),
//
// which is √(reference/V) where V is well below the reference and tends to 1
// where it is above; a sharp bend between the two would ring in time. A is 1
// where vs30MPS is zero. The motion is that of linear ground.
//
// Source: the quarter-wavelength method of W. B. Joyner, R. E. Warrick & T. E.
// Fumal (1981), Bull. Seismol. Soc. Am. 71:1333–1349. The single power law, the
// constant density and the smooth bend are our simplification; their two
// exponents are chosen to follow the generic rock site of D. M. Boore & W. B.
// Joyner (1997), Bull. Seismol. Soc. Am. 87:327–341.
func Amplification(frequencyHz, vs30MPS, referenceMPS float64) float64 {
	if vs30MPS <= 0 {
		return 1
	}
	const power = profileExponent / (1 - profileExponent)
	v := vs30MPS * math.Pow(vs30MPS/(120*frequencyHz), power)
	r := referenceMPS / v
	r *= r
	return math.Sqrt(math.Sqrt(math.Sqrt(1 + float64(r*r))))
}
