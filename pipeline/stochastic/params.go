package stochastic

import (
	"fmt"
	"math"
)

// The dimensionless constants of the source term for shear waves on the surface
// of a half-space.
//
// Source: Boore (2003); the radiation average over the focal sphere is that of Boore & Boatwright (1984), Bull. Seismol. Soc. Am.
// 74:1615–1621.
const (
	// RadiationMean is the shear-wave radiation averaged over the focal sphere.
	RadiationMean = 0.55
	// HorizontalPartition is the share of the shear-wave vector on one of two
	// horizontal components, 1/√2.
	HorizontalPartition = 1 / math.Sqrt2
	// FreeSurface is the amplification by the free surface.
	FreeSurface = 2.0
)

// Source describes a point source with a single corner frequency.
type Source struct {
	Magnitude        float64 // moment magnitude
	StressDropPa     float64 // stress parameter of the corner frequency
	ShearVelocityMPS float64 // at the source
	DensityKGM3      float64 // at the source
	// Partition is the share of the motion on the component in question, such as
	// HorizontalPartition.
	Partition float64
}

// Path describes the way from source to site.
type Path struct {
	// DistanceM is the distance of the point source; see EffectiveDistance.
	DistanceM float64
	// BreakM is the distance up to which amplitudes fall with 1/R; beyond it they
	// fall with R to the power −FarExponent.
	BreakM      float64
	FarExponent float64
	// The quality factor is Q(f) = Q0·(f/1 Hz)^QExponent, and waves that it damps
	// travel at VelocityMPS.
	Q0          float64
	QExponent   float64
	VelocityMPS float64
	// DurationSPerM is the growth of duration with distance, in s/m.
	DurationSPerM float64
}

// Site describes the ground under the instrument.
type Site struct {
	// Vs30MPS is the time-averaged shear-wave velocity of the uppermost 30 m. Zero
	// means rock of the source's own velocity, without amplification.
	Vs30MPS float64
	KappaS  float64 // near-surface attenuation, exp(−π·KappaS·f)
}

// Params describes one component of one motion.
type Params struct {
	Source Source
	Path   Path
	Site   Site
	Window Window

	// LowCutHz and HighCutHz are the −3 dB corners of the filters that the target
	// carries, zero for none. Without a low cut the displacement of a large event
	// outlasts any record.
	LowCutHz  float64
	HighCutHz float64
	// OnsetS is the time from the first sample to the start of the window. With
	// 2.25/LowCutHz before and after the window the filter has rung out at both
	// ends of the series.
	OnsetS float64
	// Response is a further factor on the target at a frequency in Hz, such as the
	// transfer function of a building, or nil.
	Response func(frequencyHz float64) float64
}

// Validate returns an error that names the first quantity outside its range.
// FourierTarget and Simulate give meaningful values for valid parameters only.
func (p Params) Validate() error {
	for _, q := range []struct {
		name     string
		value    float64
		zeroFine bool
	}{
		{"stress drop in Pa", p.Source.StressDropPa, false},
		{"source shear velocity in m/s", p.Source.ShearVelocityMPS, false},
		{"source density in kg/m³", p.Source.DensityKGM3, false},
		{"partition", p.Source.Partition, false},
		{"distance in m", p.Path.DistanceM, false},
		{"spreading break in m", p.Path.BreakM, false},
		{"far spreading exponent", p.Path.FarExponent, true},
		{"Q0", p.Path.Q0, false},
		{"Q exponent", p.Path.QExponent, true},
		{"path velocity in m/s", p.Path.VelocityMPS, false},
		{"duration growth in s/m", p.Path.DurationSPerM, true},
		{"Vs30 in m/s", p.Site.Vs30MPS, true},
		{"kappa in s", p.Site.KappaS, true},
		{"low cut in Hz", p.LowCutHz, true},
		{"high cut in Hz", p.HighCutHz, true},
		{"onset in s", p.OnsetS, true},
	} {
		// Written so that NaN fails as well.
		if !(q.value > 0 || q.zeroFine && q.value == 0) || math.IsInf(q.value, 0) {
			return fmt.Errorf("stochastic: %s is %g", q.name, q.value)
		}
	}
	if !(p.Source.Magnitude >= 0 && p.Source.Magnitude <= 10) {
		return fmt.Errorf("stochastic: magnitude is %g; it must lie in 0 to 10", p.Source.Magnitude)
	}
	if p.HighCutHz > 0 && p.HighCutHz <= p.LowCutHz {
		return fmt.Errorf("stochastic: high cut %g Hz is not above low cut %g Hz", p.HighCutHz, p.LowCutHz)
	}
	return p.Window.validate()
}

// DurationS returns the duration of ground motion, the source's 1/f0 plus the
// path's share, in s.
//
// Source: Boore (2003).
func (p Params) DurationS() float64 {
	f0 := CornerFrequency(Moment(p.Source.Magnitude), p.Source.StressDropPa, p.Source.ShearVelocityMPS)
	return 1/f0 + float64(p.Path.DurationSPerM*p.Path.DistanceM)
}

// SpanS returns the time from the first sample to the end of the window, in s: a
// series should be at least this long.
func (p Params) SpanS() float64 {
	return p.OnsetS + float64(p.Window.Stretch*p.DurationS())
}
