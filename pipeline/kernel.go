package pipeline

import "swaybook/pipeline/spectrum"

// SolverVersion is the version of the solver, which a store's spectra must share.
const SolverVersion = spectrum.Version

// UseKernel chooses the solver's inner loops for the whole process: "portable",
// "avx2" or "avx512", as far as the processor has them. Results have the same
// bits with each. It must not be called while a run or a question is at work.
func UseKernel(name string) error { return spectrum.UseKernel(name) }
