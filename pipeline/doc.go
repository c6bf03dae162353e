// Package pipeline fills the store: it finds record files, in archives too,
// reads and solves them concurrently and hands the results, in the order of the
// paths, to one writer; then it rotates the horizontals of every record that
// lacks that.
//
// Promises: one bad file never stops the batch; results depend neither on the
// number of workers nor on the order in which files are named; what waits is
// bounded, so memory does not grow with the number of files; a stop in the
// middle leaves whole files behind, and the same call again finishes the rest.
//
// Start at Run. The numerics live in packages of their own that import nothing
// of ours: spectrum (the oscillator) and stochastic (invented motions).
package pipeline
