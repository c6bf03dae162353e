package kernel

import (
	"fmt"
	"math"
	"slices"
	"testing"
)

// plainly checks numbers against those of a second implementation without fused
// operations.
func plainly(t *testing.T, what string, i int, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= 1e-14*max(1, math.Abs(want))) {
		t.Errorf("%s %d = %v, want %v", what, i, got, want)
	}
}

// TestOutlineIsItsDefinition checks what is made of an outline.
func TestOutlineIsItsDefinition(t *testing.T) {
	use(t, Portable)
	exceeded := 0
	for seed := range uint64(40) {
		c := newPlane(int(seed%3), ^uint32(0), normal(seed))
		c.form.Middle = 0.3*float64(seed%10) - 1 // so that some exceed and some do not
		count, most := 0, 0.0
		c.run()
		c.limit = slices.Sorted(slices.Values(c.outline[:]))[(7+29*seed)%Directions]
		c.outline.Above(c.limit, c.set)
		found := false
		for i := range Directions {
			sin, cos := math.Sincos(float64(i) * math.Pi / Directions)
			toward := func(p Point) float64 { return math.Abs(p.X*cos + p.Y*sin) }
			top := c.start[i]
			for _, p := range c.points {
				top = max(top, toward(p))
			}
			plainly(t, "outline", i, c.outline[i], top)
			most = max(most, top)
			above := c.outline[i] > c.limit
			if above != (c.set[i/64]>>(i%64)&1 == 1) {
				t.Errorf("direction %d: %v above %v is %v in the set", i, c.outline[i], c.limit, !above)
			}
			if above {
				count++
			}
			f := c.form
			room := max(0, max(top, f.Floor)-max(toward(f.Points[0]), toward(f.Points[1])))
			double := 2 * float64(i) * math.Pi / Directions
			found = found || f.Middle+f.Cosine*math.Cos(double)+f.Sine*math.Sin(double) > room*room
		}
		if rest := c.set[2] >> (Directions - 128); rest != 0 {
			t.Errorf("seed %d: bits beyond the directions: %#x", seed, rest)
		}
		if c.exceeds != found {
			t.Errorf("seed %d: exceeds %v, want %v", seed, c.exceeds, found)
		}
		if found {
			exceeded++
		}
		if count == 0 || count == Directions {
			t.Errorf("seed %d: %d directions above, so that the test shows nothing", seed, count)
		}
		plainly(t, "greatest of seed", int(seed), c.greatest, most)
	}
	if exceeded < 5 || exceeded > 35 {
		t.Errorf("%d of 40 forms exceed, so that the test shows little", exceeded)
	}
}

// TestExceedsFindsEveryDirection raises the form above the room in one direction
// alone, of all and whichever lane it is in.
func TestExceedsFindsEveryDirection(t *testing.T) {
	for _, name := range Names() {
		use(t, name)
		c := newPlane(0, 0, func() float64 { return 0 })
		for i := range c.outline {
			c.outline[i] = 2
		}
		c.form.Middle = 1
		for i := range Directions {
			if c.outline.Exceeds(c.compass, c.twice, c.form) {
				t.Fatalf("%s: 1 exceeds 4", name)
			}
			c.outline[i] = 0.5
			if !c.outline.Exceeds(c.compass, c.twice, c.form) {
				t.Errorf("%s: 1 does not exceed 1/4 in direction %d", name, i)
			}
			c.form.Floor = 1.5
			if c.outline.Exceeds(c.compass, c.twice, c.form) {
				t.Errorf("%s: 1 exceeds the floor's 9/4 in direction %d", name, i)
			}
			c.outline[i], c.form.Floor = 2, 0
		}
	}
}

// TestProjectIsItsDefinition checks the lanes asked for.
func TestProjectIsItsDefinition(t *testing.T) {
	use(t, Portable)
	c := newPlane(20, 0x0ff0a001, normal(3))
	c.run()
	for i, p := range c.points {
		for l := range Lanes {
			if c.want>>l&1 == 1 {
				plainly(t, fmt.Sprintf("row %d lane", i), l, c.rows[i][l], p.X*c.rays.Cos[l]+p.Y*c.rays.Sin[l])
			}
		}
	}
}

// TestSweepAndDisplaceAreTheirDefinition checks distances and displacements.
func TestSweepAndDisplaceAreTheirDefinition(t *testing.T) {
	use(t, Portable)
	c := newPlane(12, 0, normal(7))
	c.every = 3
	c.run()
	for l := range Lanes {
		for k := range c.sweep {
			sin, cos := math.Sincos(float64(k) * math.Pi / Sweeps)
			top := c.start[k+l]
			for i := 0; i < 12; i += 3 {
				top = max(top, math.Abs(c.rowsX[i][l]*cos+c.rowsY[i][l]*sin))
			}
			plainly(t, fmt.Sprintf("sweep %d lane", k), l, c.sweep[k][l], top)
		}
		for i, a := range c.ground[:len(c.level)] {
			q := c.displaced
			u := q.Scale[l]*c.marksX[i].X[l] + q.Slope[l]*(c.ground[i+1]-a) + q.Level[l]*a
			plainly(t, fmt.Sprintf("displacement %d lane", i), l, c.level[i][l], u)
		}
	}
}

// TestVibrateIsItsDefinition checks the lanes asked for.
func TestVibrateIsItsDefinition(t *testing.T) {
	use(t, Portable)
	c := newPlane(9, 0xf00ff003, normal(8))
	c.run()
	for i := range c.states {
		a, s := c.ground[i], c.ground[i+1]-c.ground[i]
		for l := range Lanes {
			if c.want>>l&1 == 0 {
				continue
			}
			q, u, end := c.vibration, c.rowsEnd[i][l], c.rowsEnd[i+1][l]
			x := q.Scale[l]*u + q.Level[l]*a + q.Slope[l]*s
			y := q.Carry[l]*u + q.Change[l]*(end-u) + q.Push[l]*a + q.Bend[l]*s
			plainly(t, fmt.Sprintf("displacement %d lane", i), l, c.states[i].X[l], x)
			plainly(t, fmt.Sprintf("velocity %d lane", i), l, c.states[i].Y[l], y)
		}
	}
}

// TestFencesAreTheirDefinition checks the flags of both fences.
func TestFencesAreTheirDefinition(t *testing.T) {
	use(t, Portable)
	const n = 60
	c := newPlane(n, 0xfff0ffff, normal(4))
	c.every = 2
	for l := range Lanes {
		c.fence.Limit[l] *= 2
		c.orbits.Inner[l] *= 0.3
	}
	c.run()
	var count [2]int
	for i := range n {
		for l := range Lanes {
			within := [2]bool{c.inFence(i, l), c.inOrbits(i, l)}
			for j, flags := range c.flags {
				flag, want := flags[i]>>l&1 == 1, c.want>>l&1 == 1 && !within[j] && (j == 1 || i%2 == 0)
				if flag != want {
					t.Errorf("fence %d, row %d lane %d: flag %v, want %v", j, i, l, flag, want)
				}
				if flag {
					count[j]++
				}
			}
		}
	}
	for j, k := range count {
		if k < n || k > n*(Lanes-5) {
			t.Errorf("fence %d: %d flags of %d, so that the test shows little", j, k, n*Lanes)
		}
	}
}

func (c *planeCase) inFence(i, l int) bool {
	for _, side := range c.fence.Sides {
		if math.Abs(c.rowsX[i][l]*side.X[l]+c.rowsY[i][l]*side.Y[l]) > c.fence.Limit[l] {
			return false
		}
	}
	return true
}

func (c *planeCase) inOrbits(i, l int) bool {
	o, x, y := c.orbits, &c.marksX[i], &c.marks[i]
	xx, yy := x.X[l]*x.X[l]+x.Y[l]*x.Y[l], y.X[l]*y.X[l]+y.Y[l]*y.Y[l]
	xy := x.X[l]*y.X[l] + x.Y[l]*y.Y[l]
	room := math.Pow(max(0, 1-o.First[l]*c.lines[i].First-o.Second[l]*c.lines[i].Second), 2)
	if o.Inner[l]*(xx+yy) <= room {
		return true
	}
	middle := func(a []float64) float64 { return o.Level[l]*(a[i]+a[i+1]) + o.Slope[l]*(a[i+1]-a[i]) }
	for _, side := range o.Sides {
		line := math.Abs(side.X[l]*middle(c.ground)+side.Y[l]*middle(c.groundY)) + o.Rise[l]*c.lines[i].Second
		if side.XX[l]*xx+side.XY[l]*xy+side.YY[l]*yy > math.Pow(max(0, 1-line), 2) {
			return false
		}
	}
	return true
}

// TestJoinPeaksIsItsDefinition checks both kinds of peaks, and sums in the place
// of what they are sums of.
func TestJoinPeaksIsItsDefinition(t *testing.T) {
	c := newPlane(9, 0, normal(5))
	c.run()
	for i := range c.marks {
		for l := range Lanes {
			x, y := c.marksX[i].Peak[l], c.marks[i].Peak[l]
			plainly(t, "sum of squares in lane", l, c.sums[0][i].Peak[l], x*x+y*y)
			plainly(t, "sum in lane", l, c.sums[1][i].Peak[l], x+y)
		}
	}
	var none [2]Mark
	for _, squares := range []bool{false, true} {
		if JoinPeaks(none[:1], none[1:], none[1:], squares); !(none[0].Peak[3] > 0 && none[0].Peak[3] < 1e-300) {
			t.Errorf("peaks of nothing, squares %v: %g", squares, none[0].Peak[3])
		}
		none[0] = Mark{}
	}
	JoinPeaks(c.marksX, c.marksX, c.marks, false)
	for i := range c.marks {
		if c.marksX[i].Peak != c.sums[0][i].Peak {
			t.Errorf("mark %d: sums in place differ", i)
		}
	}
}

// TestPlaneLengths: lengths that differ panic.
func TestPlaneLengths(t *testing.T) {
	c := newPlane(3, 1, normal(6))
	for name, f := range map[string]func(){
		"project": func() { Project(c.rows[:2], c.rays, c.points, 1) },
		"fence":   func() { ScreenFence(c.fence, c.rowsX, c.rowsY[:2], 1, c.flags[0], 1) },
		"flags":   func() { ScreenFence(c.fence, c.rowsX, c.rowsY, 1, c.flags[0][:2], 1) },
		"every":   func() { ScreenFence(c.fence, c.rowsX, c.rowsY, 0, c.flags[0], 1) },
		"orbits": func() {
			ScreenOrbits(c.orbits, &Orbits{c.marksX, c.marks[:2], c.ground, c.ground, c.lines}, c.flags[1])
		},
		"grounds": func() {
			ScreenOrbits(c.orbits, &Orbits{c.marksX, c.marks, c.ground, c.ground[:3], c.lines}, c.flags[1])
		},
		"lines": func() {
			ScreenOrbits(c.orbits, &Orbits{c.marksX, c.marks, c.ground, c.ground, c.lines[:2]}, c.flags[1])
		},
		"sweep":  func() { c.sweep.Add(c.compasses, c.rowsX[:2], c.rowsY, 1) },
		"states": func() { Displace(c.level, c.displaced, c.marks[:2], c.ground) },
		"ground": func() { Displace(c.level, c.displaced, c.marks, c.ground[:3]) },
		"steps":  func() { Vibrate(c.states, c.vibration, c.rowsX, c.ground, 1) },
		"slopes": func() { Vibrate(c.states, c.vibration, c.rowsEnd, c.ground[:3], 1) },
		"peaks":  func() { JoinPeaks(c.sums[0], c.marksX, c.marks[:2], true) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			f()
		})
	}
}
