// Package stats reduces a sample of positive ordinates to the figures that a
// spectrum query reports: arithmetic and geometric mean, standard deviation of
// the natural logarithm, and percentiles; of values that count with weights or
// are repeated, too. It says what a sample supports: effective numbers, intervals
// of percentiles, resampling by clusters, and whether it is lognormal.
//
// It is pure: no state, no input or output. Products that feed a sum are
// rounded explicitly and logarithms are computed here, so that the same sample
// gives the same bits on every architecture; the functions of package math
// are assembly on some and may be fused on others.
//
// Start at Mean, LogMoments and Percentiles, then at shares, which is behind all
// that weighs and repeats.
package stats
