// Package likeness tells whether two series of samples are the same ground motion:
// the same but for a factor of either sign, an offset, what was cut off at the ends
// or slight processing such as a filter outside the band of the motion.
//
// What is compared is the Pearson correlation ρ over the samples that two series
// share at a lag, at the lag where |ρ| is greatest. It knows neither factor nor
// offset. The shared part must be most of both: four fifths of the samples of the
// shorter one, and of the energy of each. A fragment without the strong motion is
// therefore another motion. It must cross its mean 16 times, since fewer swings
// may look alike by chance.
//
//	Identical  |ρ| ≥ 0.99995 and a factor of 1 within 0.2 %
//	Scaled     |ρ| ≥ 0.99995
//	Similar    |ρ| ≥ 0.97
//	Different  anything else, with a reason
//
// Why these limits. √(1 − ρ²) is the size of what differs against the motion: 1 % at
// 0.99995, which covers the digits that formats drop, and 24 % at 0.97. The factor of
// 0.2 % covers a unit converted with g rounded to 9.8 or 9.81. The limit of Similar
// lies between what the tests of this package measure. Band-passed 0.1–25 Hz without
// a shift of phase, invented motions of M 4 to 7.5 keep ρ ≥ 0.993, recordings ≥ 0.982,
// the least where energy lies above 25 Hz. Invented motions of equal source, path and
// site but other random numbers reach 0.59, recordings of different channels 0.54;
// mixed so that nine tenths of the energy are common, as at stations next to each
// other, 0.95.
//
// Limits of use. A filter that turns phases, run forward only, leaves 0.91 to 0.99,
// falling with magnitude: the Verdict tells the correlation, so that a caller can list
// what lies below the limit and far above chance. Sensors on one foundation or floor
// may be Similar, since their motions are. A shift by a fraction of a step is no lag:
// half a step of 0.01 s turns a wave of 5 Hz by 9 degrees, ρ = 0.988. A baseline that
// drifts is no offset. Start times are not asked for: headers give that of the trigger
// or of the first sample, in local or universal time; a caller who trusts them need not
// compare what they keep apart.
//
// How it works. NewMotion keeps the places of a few great swings of each series; pairs
// that look alike around none of them are Different at the cost of some microseconds
// (file extremes.go). The rest are correlated at all lags by Fourier transform (file
// search.go). Where steps differ, every sample of the coarser series meets the finer
// one, which is interpolated only if the ratio of the steps is not whole (file
// steps.go).
//
// Start at NewMotion and Comparer.Compare.
package likeness
