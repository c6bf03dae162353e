// Package mixed splits the spread of values that come in groups, such as those
// of one earthquake, into what lies between groups and what lies within them:
// the one-way model with random effects
//
//	y = μ + η + ε,  Var η = τ² (one η a group),  Var ε = φ².
//
// It is pure: no state, no input or output. The same values in any order give
// the same bits on every architecture.
//
// Start at Fit; Fitter is for many fits in a row.
package mixed
