// Package spectrum computes the elastic response of damped single-degree-of-
// freedom oscillators to recorded ground acceleration, reduced to the greatest
// relative displacement D of each.
//
// An oscillator of period T and damping ratio ζ, ω = 2π/T, obeys
//
//	ü + 2ζω·u̇ + ω²·u = −a(t)
//
// with u relative to the ground. The ground acceleration a is linear between
// samples, the oscillator is at rest before the first sample, and after the
// last sample the ground is still, so that the oscillator rings free. With the
// method NigamJennings the recurrence from sample to sample is exact for this
// motion, and D is the greatest |u| of the whole motion in continuous time, the
// time between samples and the free ringing included. It is not the greatest
// |u| among samples, which falls short by up to the fraction 1 − cos(π·dt/T).
// V = ω·D and A = ω²·D are the pseudo-velocity and the pseudo-acceleration.
//
// Promises. Numbers are SI; damping is a fraction. The result for an oscillator
// does not depend on which others are solved with it. Only + − × ÷ √ and fused
// multiply-adds that are asked for are used, none left open to fusing, so every
// architecture and every kernel computes the same bits. A Solver is immutable and safe for
// concurrent use. No allocation is made per sample.
//
// How it works. Oscillators march in the lanes of vectors (package kernel). Time
// is counted in sampling steps and acceleration in a power of two near its peak,
// so that no coefficient depends on units. An oscillator whose period is long
// against the step marches as a second-order difference equation (type slow), of
// the response to impulses (train.go), or many steps at once (type stride); one
// whose period is short as the free vibration left over when the straight-line
// particular solution of each step is taken away (type fast). All keep, per block
// of steps, the starting state and one maximum, from which a bound on |u| within
// the block follows. Blocks whose bound exceeds the best |u| known are marched
// again, a block to a lane, with every step kept (type visits). In the steps whose
// own bound exceeds it the turning points are found on the Taylor series of u
// (type series), which converges to rounding error within a few terms.
//
// Start at NewSolver and Solver.SD; Grid is the list of oscillators that a
// database is built on; Peaks gives the limits of D and A at long and short
// periods.
//
// Sources: N. C. Nigam and P. C. Jennings, "Calculation of response spectra from
// strong-motion earthquake records", Bulletin of the Seismological Society of
// America 59(2), 1969, 909–922, for the exact recurrence; N. M. Newmark, "A
// method of computation for structural dynamics", Journal of the Engineering
// Mechanics Division, ASCE 85(EM3), 1959, 67–94, for the methods of average and
// of linear acceleration. The bounds and the two marching forms are derived where they
// are used.
package spectrum

// Version names the arithmetic of this package. It is stored with results and
// changes whenever the bits of a result may change.
const Version = "5"
