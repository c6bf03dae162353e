// Package intensity has the scalar measures of an accelerogram's strength, length and
// frequency content: Arias intensity, cumulative absolute velocity, durations, root mean
// square, mean period and Housner's spectrum intensity.
//
// The acceleration is linear between its samples, as it is for the oscillators, so that
// integrals over it are exact. Accelerations are in m/s² and steps in s.
package intensity
