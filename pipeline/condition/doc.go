// Package condition makes raw and corrected accelerograms comparable and says over
// which periods their spectra can be believed.
//
// A Recipe is a declared list of steps. Apply carries it out on one component and
// returns the conditioned motion with the corners of the filters that it has behind it,
// and its usable band. Everything follows from the samples, the recipe and what the
// header states: no state, no clock.
package condition
