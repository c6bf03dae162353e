package spectrum

import (
	"math"
	"testing"
)

// TestTrainStartsAtRest: what comes before the first sample leaves the oscillator at
// rest there, and after a step where the exact recurrence has it.
func TestTrainStartsAtRest(t *testing.T) {
	a := seededMotion(61, 3*blockSteps)
	m := newMotion()
	m.load(a)
	for _, phase := range []float64{1e-4, 0.01, 0.1, 0.5, 1, 1.25} {
		for _, damping := range []float64{0, 0.02, 0.2, 0.9} {
			o, ok := newSlow(0, phase, damping)
			if !ok {
				continue
			}
			g := newSlowGroups([]slow{o})[0]
			g.march(m)
			u, x, _ := g.resume(m, 0, 0, 0)
			want := o.first(m).x
			if size := math.Abs(m.a[0]) + math.Abs(m.a[1]); math.Abs(u) > 2e-15*size || math.Abs(x-want) > 4e-15*size {
				t.Errorf("phase %g damping %g: u starts at %g and %g, want 0 and %g", phase, damping, u, x, want)
			}
		}
	}
}
