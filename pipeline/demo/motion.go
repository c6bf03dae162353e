package demo

import (
	"math"
	"math/rand/v2"
	"time"

	"swaybook/pipeline/stochastic"
)

// The invented crust, and how the networks record and filter.
const (
	shearVelocity = 3500.0 // m/s
	density       = 2800.0 // kg/m³
	qualityFactor = 150.0  // at 1 Hz
	lowCutHz      = 0.15
	quietS        = 15.0 // before and after the motion, 2.25 periods of the low cut
	boreholeKappa = 0.015
	// verticalShare is the vertical motion over a horizontal one on rock; 2/3 is
	// common practice.
	verticalShare = 2.0 / 3
	// rockVs30 is the least Vs30 that the vertical motion feels, in m/s.
	rockVs30 = 760
	// scatter is the standard deviation of the natural logarithm of amplitude
	// from record to record of one event; common practice puts it near 0.5 where
	// there is no point source to add a scatter of its own.
	scatter = 0.4
	// The roof of the school sways with this period and damping.
	roofPeriodS = 0.45
	roofDamping = 0.05
)

// highCutHz is the high-cut corner at a sampling rate: below half of it by a
// margin, and 40 Hz at most.
func highCutHz(rateHz int) float64 { return min(40, 0.4*float64(rateHz)) }

// record is what one place of a station recorded of one event.
type record struct {
	event   *event
	station *station
	place   place

	distanceKM float64 // epicentral
	azimuthDeg float64 // from epicentre to station
	start      time.Time
	// north, east and up are acceleration in µm/s², as a recorder's integers.
	north, east, up []int32
}

// stepsPerMPS2 is the resolution of the recorder that the samples stand for, in
// steps per m/s². Rounding to it makes the files the same on all machines, but
// for a chance below one in a thousand that one of the millions of samples lies
// within the last bits of a rounding boundary: with and without fused
// multiply-add in the libraries, 160 000 samples of up to 1.3 m/s² differed by
// 4.4e-16 m/s² at most and 4e-17 m/s² in the mean.
const stepsPerMPS2 = 1e6

// durationS returns the length of a record in s, always whole.
func (r *record) durationS() int { return len(r.north) / r.station.rateHz }

// simulate makes the records of one event at one station, that of the surface
// first. All random numbers come from rng.
func simulate(e *event, s *station, rng *rand.Rand) []*record {
	km, azimuth := epicentral(e, s)
	hypocentral := 1000 * math.Sqrt(float64(km*km)+float64(e.depthKM*e.depthKM))
	factor := math.Exp(scatter * rng.NormFloat64())
	places := []place{surface}
	if s.second != nowhere {
		places = append(places, s.second)
	}
	// The places of a station share their randomness: their motions differ by what
	// lies between them.
	seed := [3]uint64{rng.Uint64(), rng.Uint64(), rng.Uint64()}
	var list []*record
	for _, at := range places {
		p := parameters(e, s, at, hypocentral)
		n := int(math.Ceil(p.SpanS()+quietS)) * s.rateHz
		travel := time.Duration(math.Round(hypocentral/shearVelocity)) * time.Second
		r := &record{
			event: e, station: s, place: at,
			distanceKM: km, azimuthDeg: azimuth,
			start: e.origin.Add(travel - quietS*time.Second),
		}
		motion := make([]float64, n)
		component := func(i int, p stochastic.Params) []int32 {
			stochastic.Simulate(motion, 1/float64(s.rateHz), p, rand.New(rand.NewPCG(seed[i], uint64(i))))
			return digitise(motion, factor)
		}
		r.north, r.east = component(0, p), component(1, p)
		r.up = component(2, vertical(p, at))
		list = append(list, r)
	}
	return list
}

// digitise returns the motion in m/s² times factor as the recorder's integers.
func digitise(motion []float64, factor float64) []int32 {
	steps := make([]int32, len(motion))
	for i, a := range motion {
		steps[i] = int32(math.Round(a * factor * stepsPerMPS2))
	}
	return steps
}

// parameters returns those of a horizontal component.
func parameters(e *event, s *station, at place, hypocentralM float64) stochastic.Params {
	p := stochastic.Params{
		Source: stochastic.Source{
			Magnitude: e.magnitude, StressDropPa: e.stressPa,
			ShearVelocityMPS: shearVelocity, DensityKGM3: density,
			Partition: stochastic.HorizontalPartition,
		},
		Path: stochastic.Path{
			DistanceM: stochastic.EffectiveDistance(e.magnitude, hypocentralM),
			BreakM:    50e3, FarExponent: 0.5,
			Q0: qualityFactor, QExponent: 0.5, VelocityMPS: shearVelocity,
			DurationSPerM: 5e-5,
		},
		Site:     stochastic.Site{Vs30MPS: s.vs30, KappaS: s.kappaS},
		Window:   stochastic.StandardWindow(),
		LowCutHz: lowCutHz, HighCutHz: highCutHz(s.rateHz),
		OnsetS: quietS,
	}
	switch at {
	case roof:
		p.Response = func(f float64) float64 { return swayAmplitude(f * roofPeriodS) }
	case borehole:
		// Rock, and half the surface's motion: there is no free surface at depth.
		p.Site = stochastic.Site{KappaS: boreholeKappa}
		p.Response = func(float64) float64 { return 1 / stochastic.FreeSurface }
	}
	return p
}

// vertical turns the parameters of a horizontal component into those of the
// vertical: a share of it, without the amplification of soft ground, and without
// sway.
func vertical(p stochastic.Params, at place) stochastic.Params {
	p.Source.Partition *= verticalShare
	switch at {
	case roof:
		p.Response = nil
		fallthrough
	case surface:
		p.Site.Vs30MPS = max(p.Site.Vs30MPS, rockVs30)
	}
	return p
}

// swayAmplitude returns the absolute acceleration of a damped oscillator over
// that of its base, at the ratio r of the frequency to its own,
//
//	√((1 + (2ζr)²)/((1 − r²)² + (2ζr)²)).
//
// Source: A. K. Chopra, Dynamics of Structures, on transmissibility.
func swayAmplitude(r float64) float64 {
	damping := 2 * roofDamping * r
	d := float64(damping * damping)
	q := 1 - float64(r*r)
	return math.Sqrt((1 + d) / (float64(q*q) + d))
}
