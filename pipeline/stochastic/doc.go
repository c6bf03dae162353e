// Package stochastic simulates earthquake ground acceleration by the stochastic
// method: band-limited Gaussian noise, shaped in time by a window and in
// frequency by the Fourier amplitude spectrum that a point source, the path and
// the site are expected to give.
//
// Everything is in SI units (m, s, Hz, m/s², Pa, N·m, kg/m³); angles do not
// occur. Functions are pure: the only randomness is the generator that the
// caller hands in, so equal seeds give equal motions. No product is left for a
// compiler to fuse with a sum. The transform and the elementary functions come
// from libraries that may differ in the last bits between architectures; a
// caller that needs the same digits everywhere rounds the samples to a step far
// above those bits, as a recorder does.
//
// Start at Params, then FourierTarget for the spectrum and Simulate for a
// motion.
//
// Source: D. M. Boore (2003), Simulation of ground motion using the stochastic
// method, Pure and Applied Geophysics 160:635–676, doi 10.1007/PL00012553. Its
// formulas and constants, and those of the other works cited, are given from
// memory and checked in the tests by derivation or by a second route where one
// exists.
package stochastic
