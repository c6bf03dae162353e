// Package likeness tells whether two series of samples are the same ground motion:
// the same but for a factor of either sign, an offset, what was cut off at the ends
// or slight processing such as a filter outside the band of the motion.
//
// What is compared is the Pearson correlation ρ over the samples that two series
// share at a lag, at the lag where |ρ| is greatest. It knows neither factor nor
// offset. The shared part must be most of both: four fifths of the samples of the
// shorter one, and of the energy of each. A fragment that begins or ends within the
// strong motion is therefore the same only where its samples are, but for factor and
// offset (Scaled); then most of its own energy is enough, a tenth of the other's,
// and one of its greatest swings among those of the other. The part must cross its mean 16 times, since fewer swings
// may look alike by chance.
//
//	Identical  |ρ| ≥ 0.99995 and a factor of 1 within 0.2 %
//	Scaled     |ρ| ≥ 0.99995
//	Similar    |ρ| ≥ 0.97, or ≥ 0.99 in the band
//	Near       |ρ| ≥ 0.85 in the band
//	Different  anything else, with a reason
//
// The band is what both have between 1 and 10 Hz, or 0.6 of the lower Nyquist
// frequency: through Butterworth filters of second order, forward and backward, for
// comparing only. Processing takes from a motion its drift, the offsets of its
// baseline and noise, which are most of many a raw one; inside the band each version
// has what the motion had. Near is for callers who know otherwise that one sensor
// recorded both.
//
// Why these limits. √(1 − ρ²) is the size of what differs against the motion: 1 % at
// 0.99995, which covers the digits that formats drop, 24 % at 0.97 and 14 % at 0.99.
// The factor of 0.2 % covers a unit converted with g rounded to 9.8 or 9.81. The other
// limits lie between what the tests of this package measure (-v prints it), over
// invented motions of M 4 to 7.5, which as recorded have a drift or a wave of 20 s half
// as great as they are, steps of a tenth, noise of 3 % or a random walk of a tenth:
//
//	ρ of raw and corrected motions       as they are       in the band
//	0.05–25 Hz without a shift of phase  0.51  … 0.99      0.999 … 1.000
//	0.2–30 Hz, at 200 or 100 Hz          0.25  … 0.99      1.000
//	0.5–15 Hz, at 200 or 100 Hz          0.22  … 0.97      0.997 … 1.000
//	1–10 Hz                              0.18  … 0.92      0.975 … 0.993
//	0.2–30 Hz, forward only              0.24  … 0.96      0.983 … 0.996
//	0.5–15 Hz, forward only, at 100 Hz   0.22  … 0.88      0.89  … 0.98
//
//	ρ of a raw motion and another corrected one
//	another direction of its kind        0.18  … 0.37      0.18  … 0.54
//	100 m away                           0.36  … 0.70      0.57  … 0.72
//	50 m away                            0.56  … 0.88      0.83  … 0.90
//	20 m away                            0.77  … 0.96      0.96  … 0.984
//	10 m away                            0.83  … 0.98      0.985 … 0.996
//
// Recordings with such a drift keep 0.9996 in the band and 0.43 as they are, corrected
// 0.3–20 Hz at half their rate; recordings of other channels reach 0.53 as they are and
// 0.57 in the band. A wider band takes in more of what processing takes and less of
// what distance does: in 0.3–15 Hz raw and corrected 0.5–15 Hz keep 0.98 only, and a
// sensor 50 m away reaches as much as in this one.
//
// Limits of use. Sensors on one foundation or floor may be Similar, since their motions
// are: no correlation tells them apart. Nor does Near tell points 50 m from each other
// apart. A filter that turns phases, run forward only, leaves less the higher its low
// corner is. A shift by a fraction of a step is no lag: half a step of 0.01 s turns a
// wave of 5 Hz by 9 degrees, ρ = 0.988. Start times are not asked for: headers give that
// of the trigger or of the first sample, in local or universal time. A caller who trusts
// them need not compare what they keep apart, and has the lag to compare with them.
//
// How it works. NewMotion keeps the places of a few great swings of each series; pairs
// that look alike around none of them are Different at the cost of some microseconds.
// The rest are correlated at all lags by Fourier transform. Where steps differ, every
// sample of the coarser series meets the finer one, which is interpolated only if the
// ratio of the steps is not whole.
//
// Start at NewMotion and Comparer.Compare.
package likeness
