// Package signal has the steps by which an accelerogram is conditioned: removal of a
// mean or a trend, tapers, pads, acausal Butterworth filters, band-limited resampling,
// integration, and the smoothed Fourier spectra by which noise is told from motion.
//
// It promises numerics alone: slices in, slices out, no state, no clock, and the same
// bits on every machine. Start with Filter for the filters and with Resample for the
// step.
package signal
