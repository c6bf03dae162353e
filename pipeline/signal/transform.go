package signal

import (
	"sync"

	"gonum.org/v1/gonum/dsp/fourier"
)

// transforms keeps the tables of transforms: to make them costs as much as to use them,
// and neighbours in an archive have one length.
var transforms = sync.Pool{New: func() any { return fourier.NewFFT(1) }}

// Transform returns the Fourier coefficients 0 … n/2 of x followed by zeros up to a
// length of n, without a factor: Σ x[j]·exp(-2πi·j·k/n). n is at least the length of x;
// it is best a FastLength.
func Transform(x []float64, n int) []complex128 {
	f := transforms.Get().(*fourier.FFT)
	defer transforms.Put(f)
	if f.Len() != n {
		f.Reset(n)
	}
	padded := append(make([]float64, 0, n), x...)[:n]
	return f.Coefficients(nil, padded)
}
