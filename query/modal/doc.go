// Package modal combines the peaks of a structure's modes: how far the
// responses of two modes go together, and what the peaks of all give at once.
//
// A peak modal combination is an estimate. A spectrum says how large the
// response of each mode becomes, not when; the rules here take the ground for
// broad-band random motion that lasts for many cycles of each mode.
//
// It is pure: no state, no input or output, and the same bits on every
// architecture.
//
// Start at Coefficient and CQC.
package modal
