package kernel

import (
	"math"
	"testing"
)

// TestScreens checks the portable kernel's flags against the comparison they
// stand for.
func TestScreens(t *testing.T) {
	use(t, Portable)
	c := newCase(8, 50)
	marks, lines := make([]Mark, 50), make([]Line, 50)
	TraceFast(&c.fast, &c.start, c.ground, marks, ^uint32(0))
	peaks, squares := make([]uint32, 50), make([]uint32, 50)
	for i := range lines {
		lines[i] = Line{0.1 * float64(i%5), 0.2 * float64(i%3)}
	}
	ScreenPeaks(&c.screen, marks, lines, peaks)
	ScreenSquares(&c.screen, marks, lines, squares)
	count := [2]int{}
	for i, m := range marks {
		for l := range Lanes {
			limit := c.screen.Limit[l] - c.screen.First[l]*lines[i].First - c.screen.Second[l]*lines[i].Second
			above := [2]bool{m.Peak[l] > limit, m.Peak[l] > 0 && math.Sqrt(m.Peak[l]) > limit}
			for j, got := range [2]bool{peaks[i]>>l&1 == 1, squares[i]>>l&1 == 1} {
				if got != above[j] {
					t.Fatalf("screen %d, row %d lane %d: flag %v, value %v, limit %v", j, i, l, got, m.Peak[l], limit)
				}
				if got {
					count[j]++
				}
			}
		}
	}
	for j, n := range count {
		if n == 0 || n == 50*Lanes {
			t.Errorf("screen %d: %d flags of %d, so that the test shows nothing", j, n, 50*Lanes)
		}
	}
}

// TestScreenSteps does so for steps, and for the lanes asked for only.
func TestScreenSteps(t *testing.T) {
	use(t, Portable)
	c := newCase(9, 60)
	rows, lines, flags := make([]Row, 58), make([]Line, 57), make([]uint32, 57)
	TraceSlow(&c.slow, &c.start, c.ground, rows, ^uint32(0))
	for i := range lines {
		lines[i].First = 0.1 * float64(i%5)
	}
	const want = 0xfff0ffff
	ScreenSteps(&c.steps, rows, lines, flags, want)
	count := 0
	for i := range lines {
		for l := range Lanes {
			d := math.Abs(rows[i+1][l] - rows[i][l])
			top := max(math.Abs(rows[i][l]), math.Abs(rows[i+1][l]))
			m := c.steps.Force[l]*lines[i].First + c.steps.Curve[l]*top + c.steps.Slope[l]*d
			spare := max(0, m/2-d)
			above := want>>l&1 == 1 && spare*spare > 2*m*(c.steps.Best[l]-top)
			if got := flags[i]>>l&1 == 1; got != above {
				t.Fatalf("step %d lane %d: flag %v, want %v", i, l, got, above)
			}
			if above {
				count++
			}
		}
	}
	if count == 0 || count == len(lines)*Lanes {
		t.Errorf("%d flags of %d, so that the test shows nothing", count, len(lines)*Lanes)
	}
}

// TestScreenOrbitsOverflow: a side whose sum is infinite less infinite says
// nothing, in any kernel, and the other sides still count.
func TestScreenOrbitsOverflow(t *testing.T) {
	f, x, y := new(OrbitFence), make([]Mark, 1), make([]Mark, 1)
	for l := range Lanes {
		f.Inner[l] = 1
		f.Sides[0].XX[l], f.Sides[0].XY[l], f.Sides[0].YY[l] = 1, -2, 1
		f.Sides[1].XX[l], f.Sides[1].XY[l], f.Sides[1].YY[l] = 1, 1, 1
		x[0].X[l], y[0].X[l] = 1e200, 1e200
	}
	o := &Orbits{x, y, make([]float64, 2), make([]float64, 2), make([]Line, 1)}
	for _, name := range Names() {
		use(t, name)
		flags := []uint32{^uint32(0)}
		if ScreenOrbits(f, o, flags); flags[0] != ^uint32(0) {
			t.Errorf("%s: flags %#x, want all", name, flags[0])
		}
	}
}
