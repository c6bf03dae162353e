package spectrum

import "swaybook/pipeline/internal/kernel"

// Kernels lists the kernels that this processor runs, the fastest first: of
// "avx512", "avx2" and "portable" those that it has.
func Kernels() []string { return kernel.Names() }

// Kernel returns the name of the kernel in use, the fastest unless UseKernel
// chose another.
func Kernel() string { return kernel.Name() }

// UseKernel chooses a kernel by name; "" is the fastest. Results have the same
// bits with each. It returns an error for a name that is not one of Kernels. It
// is for a program's start and for tests: it must not run beside a Solver.
func UseKernel(name string) error { return kernel.Use(name) }
