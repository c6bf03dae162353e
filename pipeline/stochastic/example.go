package stochastic

// Example returns the parameters of an earthquake on stiff ground by magnitude and closest
// distance, as examples and tests need one; the caller sets filters and onset. Values are
// of common practice.
func Example(magnitude, distanceM float64) Params {
	return Params{
		Source: Source{Magnitude: magnitude, StressDropPa: 8e6, ShearVelocityMPS: 3500, DensityKGM3: 2800, Partition: HorizontalPartition},
		Path: Path{DistanceM: EffectiveDistance(magnitude, distanceM), BreakM: 70e3, FarExponent: 0.5,
			Q0: 150, QExponent: 0.5, VelocityMPS: 3500, DurationSPerM: 5e-5},
		Site:   Site{Vs30MPS: 450, KappaS: 0.035},
		Window: StandardWindow(),
	}
}
