// Package stats reduces a sample of positive ordinates to the figures that a
// spectrum query reports: arithmetic and geometric mean, standard deviation of
// the natural logarithm, and percentiles.
//
// It is pure: no state, no input or output. Products that feed a sum are
// rounded explicitly and logarithms are computed here, so that the same sample
// gives the same bits on every architecture; the functions of package math
// are assembly on some and may be fused on others.
//
// Start at Mean, LogMoments and Percentiles.
package stats
