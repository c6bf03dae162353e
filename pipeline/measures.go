package pipeline

import (
	"math"
	"slices"

	"swaybook/db"
	"swaybook/pipeline/condition"
	"swaybook/pipeline/intensity"
	"swaybook/pipeline/spectrum"
)

// bracketMPS2 is the level of the bracketed duration, 0.05 g.
const bracketMPS2 = 0.05 * intensity.StandardGravity

// peakMeasures are PGA, PGV and PGD as the store names them.
func peakMeasures(p spectrum.GroundPeaks) map[string]float64 {
	return map[string]float64{db.MeasurePGA: p.PGA, db.MeasurePGV: p.PGV, db.MeasurePGD: p.PGD}
}

// measures are those of a component; what a motion does not have is not among them.
func (s solvers) measures(m condition.Conditioned, sd []float64) map[string]float64 {
	x, stepS := m.Acceleration, m.StepS
	var peaks spectrum.GroundPeaks
	peaks.PGA, peaks.PGV, peaks.PGD = spectrum.Peaks(stepS, x)
	energy := intensity.EnergyOf(x, stepS)
	out := peakMeasures(peaks)
	for name, value := range map[string]float64{
		db.MeasureArias:             energy.Arias(),
		db.MeasureCAV:               intensity.AbsoluteVelocity(x, stepS),
		db.MeasureStandardisedCAV:   intensity.StandardisedAbsoluteVelocity(x, stepS),
		db.MeasureSignificant575:    energy.SignificantDuration(0.05, 0.75),
		db.MeasureSignificant595:    energy.SignificantDuration(0.05, 0.95),
		db.MeasureBracketed:         intensity.BracketedDuration(x, stepS, bracketMPS2),
		db.MeasureRMS:               energy.RootMeanSquare(),
		db.MeasureMeanPeriod:        intensity.MeanPeriod(x, stepS),
		db.MeasureSpectrumIntensity: s.spectrumIntensity(sd),
	} {
		if !math.IsNaN(value) && !math.IsInf(value, 0) {
			out[name] = value
		}
	}
	return out
}

// spectrumIntensity is NaN where the grid lacks the damping or the periods.
func (s solvers) spectrumIntensity(sd []float64) float64 {
	at := slices.Index(s.grid.Dampings, intensity.SpectrumIntensityDamping)
	if at < 0 || !slices.IsSorted(s.grid.PeriodsS) {
		return math.NaN()
	}
	psv := make([]float64, s.periods)
	for i, d := range sd[at*s.periods : (at+1)*s.periods] {
		psv[i] = 2 * math.Pi / s.grid.PeriodsS[i] * d
	}
	return intensity.SpectrumIntensity(s.grid.PeriodsS, psv)
}
