package demo

import (
	"math"
	"testing"

	"swaybook/pipeline/stochastic"
)

func TestSwayAmplitude(t *testing.T) {
	for _, c := range []struct{ r, want float64 }{
		{0, 1},            // moves with the ground
		{1, 10.049875621}, // √(1 + 4ζ²)/(2ζ) with ζ = 0.05
		{math.Sqrt2, 1},   // independent of damping
		{100, 0.001005},   // far above: 2ζ/r and a little
	} {
		if got := swayAmplitude(c.r); math.Abs(got-c.want) > 1e-3*c.want {
			t.Errorf("swayAmplitude(%g) = %.9g, want %.9g", c.r, got, c.want)
		}
	}
}

// All parameters that the region can give are valid.
func TestParametersAreValid(t *testing.T) {
	for _, e := range events(40, 1) {
		for _, s := range stations(40, 1) {
			for _, at := range []place{surface, roof, borehole} {
				p := parameters(&e, &s, at, 1000*math.Hypot(50, e.depthKM))
				for _, q := range []stochastic.Params{p, vertical(p, at)} {
					if err := q.Validate(); err != nil {
						t.Fatalf("%s at %s: %v", e.name, s.code, err)
					}
				}
			}
		}
	}
}

// pga returns the larger horizontal peak in m/s².
func pga(r *record) float64 {
	a, b := r.north[peak(r.north)], r.east[peak(r.east)]
	return max(math.Abs(float64(a)), math.Abs(float64(b))) / stepsPerMPS2
}

// The built-in region looks like a region: lengths and peaks are those of
// records, motion grows with magnitude and fades with distance, the roof moves
// more than the ground, the bottom of the borehole less.
func TestRegionLooksReal(t *testing.T) {
	var near, far, small, large []float64
	for i, e := range events(DefaultEvents, 0) {
		for j, s := range stations(DefaultStations, 0) {
			list := simulate(&e, &s, generator(0, uint64(100*i+j)))
			r := list[0]
			if d := r.durationS(); d < 20 || d > 80 {
				t.Errorf("%s at %s lasts %d s, want 20 to 80 s", e.name, s.code, d)
			}
			ground := pga(r)
			if ground < 0.002 || ground > 2*9.80665 {
				t.Errorf("%s at %s: peak %g m/s²", e.name, s.code, ground)
			}
			if up := math.Abs(float64(r.up[peak(r.up)])) / stepsPerMPS2; up > 1.5*ground {
				t.Errorf("%s at %s: vertical peak %g m/s² over %g m/s² horizontal", e.name, s.code, up, ground)
			}
			switch {
			case s.second == roof && pga(list[1]) < 1.2*ground:
				t.Errorf("%s: roof %g m/s², ground %g m/s²", e.name, pga(list[1]), ground)
			case s.second == borehole && pga(list[1]) > 0.8*ground:
				t.Errorf("%s: borehole %g m/s², ground %g m/s²", e.name, pga(list[1]), ground)
			}
			if e.magnitude < 6 {
				small = append(small, math.Log(ground))
			} else {
				large = append(large, math.Log(ground))
			}
			if r.distanceKM < 50 {
				near = append(near, math.Log(ground))
			} else {
				far = append(far, math.Log(ground))
			}
		}
	}
	// Factors of e^0.5 are far below what the model gives, and far above chance.
	if mean(near) < mean(far)+0.5 || mean(large) < mean(small)+0.5 {
		t.Errorf("mean ln PGA: %.2f within 50 km, %.2f beyond; %.2f from magnitude 6 on, %.2f below",
			mean(near), mean(far), mean(large), mean(small))
	}
}

func mean(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

// The components of a record are not copies of each other, and two records of
// one event differ.
func TestRecordsDiffer(t *testing.T) {
	e, s := &events(1, 0)[0], &stations(1, 0)[0]
	a, b := simulate(e, s, generator(0, 10))[0], simulate(e, s, generator(0, 11))[0]
	for _, c := range []struct {
		name string
		x, y []int32
	}{{"north and east", a.north, a.east}, {"north and up", a.north, a.up}, {"two records", a.north, b.north}} {
		var xy, xx, yy float64
		for i := range c.x {
			x, y := float64(c.x[i]), float64(c.y[i])
			xy, xx, yy = xy+x*y, xx+x*x, yy+y*y
		}
		if r := xy / math.Sqrt(xx*yy); !(math.Abs(r) < 0.3) {
			t.Errorf("%s have correlation %.2f", c.name, r)
		}
	}
}
