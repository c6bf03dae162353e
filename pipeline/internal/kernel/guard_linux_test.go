package kernel

import (
	"fmt"
	"os"
	"runtime/debug"
	"syscall"
	"testing"
	"unsafe"
)

// placing gives space for what a kernel reads or writes: plain, or flush against
// a page that may not be touched.
type placing struct {
	t     *testing.T
	where string // "plain", "before" or "after" the forbidden page
}

// place returns n zero values of T.
func place[T any](p *placing, n int) []T {
	size := n * int(unsafe.Sizeof(*new(T)))
	if p.where == "plain" || size == 0 {
		return make([]T, n)
	}
	page := os.Getpagesize()
	room := (size + page - 1) / page * page
	memory, err := syscall.Mmap(-1, 0, room+2*page, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_ANON|syscall.MAP_PRIVATE)
	if err != nil {
		p.t.Fatal(err)
	}
	p.t.Cleanup(func() {
		if err := syscall.Munmap(memory); err != nil {
			p.t.Error(err)
		}
	})
	for _, guard := range [][]byte{memory[:page], memory[page+room:]} {
		if err := syscall.Mprotect(guard, syscall.PROT_NONE); err != nil {
			p.t.Fatal(err)
		}
	}
	at := page
	if p.where == "before" {
		at += room - size
	}
	return unsafe.Slice((*T)(unsafe.Pointer(&memory[at])), n)
}

// copied is place with the values of a slice.
func copied[T any](p *placing, values []T) []T {
	out := place[T](p, len(values))
	copy(out, values)
	return out
}

// one is copied for a single value.
func one[T any](p *placing, value T) *T { return &copied(p, []T{value})[0] }

// placed is what the functions make of a case with everything placed.
type placed struct {
	marks  []Mark
	rows   []Row
	inputs []Input
	flags  [][]uint32
}

// runPlaced calls every function of the package but those of the plane.
func (c *testCase) runPlaced(p *placing) *placed {
	n := len(c.ground)
	steps, strides := max(n-2, 0), (n-1)/(len(c.shares)-1)
	ground := copied(p, c.ground)
	slow, fast, stride := one(p, c.slow), one(p, c.fast), one(p, c.stride)
	screen, stepScreen := one(p, c.screen), one(p, c.steps)
	lines := place[Line](p, n)
	for i := range lines {
		lines[i] = Line{0.1 * float64(i%5), 0.2 * float64(i%3)}
	}
	from := [4]*Mark{one(p, c.start), one(p, c.start), one(p, c.start), one(p, c.start)}
	to := [4]*Mark{one(p, Mark{}), one(p, Mark{}), one(p, Mark{}), one(p, Mark{})}
	MarchSlow(slow, from[0], to[0], ground)
	MarchFast(fast, from[1], to[1], ground)
	if n >= trainBeyond {
		MarchTrain(one(p, c.train), from[3], to[3], ground)
	}
	rows, marks := place[Row](p, steps), place[Mark](p, n)
	TraceSlow(slow, from[0], ground, rows, c.want)
	TraceSlow(slow, from[0], ground, rows, ^uint32(0))
	TraceFast(fast, from[1], ground, marks, c.want)
	TraceFast(fast, from[1], ground, marks, ^uint32(0))
	inputs := place[Input](p, strides)
	Mix(inputs, copied(p, c.shares), ground[:strides*(len(c.shares)-1)+1])
	MarchStride(stride, from[2], to[2], inputs)
	flags := [][]uint32{place[uint32](p, n), place[uint32](p, n), place[uint32](p, max(steps-1, 0))}
	ScreenPeaks(screen, marks, lines, flags[0])
	ScreenSquares(screen, marks, lines, flags[1])
	if steps > 0 {
		ScreenSteps(stepScreen, rows, copied(p, lines[:steps-1]), flags[2], c.want)
	}
	top, visit := one(p, Row{}), newVisit(c).placed(p)
	GreatestPeaks(top, visit.at, marks)
	return &placed{
		marks: append(marks, *from[0], *from[1], *from[2], *from[3], *to[0], *to[1], *to[2], *to[3]),
		rows:  append(append(rows, *top, *visit.at), visit.run(ground)...), inputs: inputs, flags: flags,
	}
}

// placed returns a copy with everything placed.
func (v *visit) placed(p *placing) *visit {
	return &visit{
		slow: one(p, *v.slow), start: one(p, *v.start), from: one(p, *v.from),
		ground: copied(p, v.ground), each: copied(p, v.each),
		at: one(p, Row{}), rowTop: one(p, Row{}), rowAt: one(p, Row{}),
		turn: one(p, *v.turn), factors: copied(p, v.factors),
		fast: one(p, *v.fast), phase: one(p, *v.phase), screen: one(p, *v.screen),
		marks: copied(p, v.marks), flags: copied(p, v.flags),
	}
}

// placed returns a copy of a case with everything placed.
func (c *planeCase) placed(p *placing) *planeCase {
	d := &planeCase{
		start: c.start, outline: one(p, Outline{}), compass: one(p, *c.compass), twice: one(p, *c.twice), form: one(p, *c.form),
		rays: one(p, *c.rays), fence: one(p, *c.fence), orbits: one(p, *c.orbits), set: one(p, Above{}),
		points: copied(p, c.points), rowsX: copied(p, c.rowsX), rowsY: copied(p, c.rowsY),
		marksX: copied(p, c.marksX), marks: copied(p, c.marks), lines: copied(p, c.lines),
		ground: copied(p, c.ground), groundY: copied(p, c.groundY), compasses: one(p, *c.compasses), displaced: one(p, *c.displaced), vibration: one(p, *c.vibration),
		limit: c.limit, want: c.want, every: c.every, sweep: one(p, Sweep{}),
		rows: place[Row](p, len(c.points)), level: place[Row](p, len(c.points)),
		rowsEnd: copied(p, c.rowsEnd), states: place[Mark](p, len(c.points)),
	}
	for i := range d.flags {
		d.flags[i], d.sums[i] = place[uint32](p, len(c.points)), place[Mark](p, len(c.points))
	}
	return d
}

// TestGuardPages runs every function of every kernel with all that it is given
// against pages that fault when they are read or written, before and after, and
// finds the results that plain space gives.
func TestGuardPages(t *testing.T) {
	for _, n := range []int{1, 2, 3, 4, 5, 6, 7, 8, 9, 13, 16, 17, 31, 33, 64, 65, 66, 67, 130} {
		c := newCase(uint64(n), n)
		plane := newPlane(n, c.want, normal(uint64(n)))
		plane.every = 1 + n%3
		run := func(where string) string {
			p := &placing{t, where}
			d := plane.placed(p)
			d.run()
			return fmt.Sprint(*c.runPlaced(p), d.made())
		}
		use(t, Portable)
		want := run("plain")
		for _, name := range Names() {
			for _, where := range []string{"before", "after"} {
				t.Run(fmt.Sprintf("%s/%s/%d", name, where, n), func(t *testing.T) {
					use(t, name)
					// A fault then fails this test instead of ending the program.
					defer debug.SetPanicOnFault(debug.SetPanicOnFault(true))
					if run(where) != want {
						t.Error("results differ from those in plain space")
					}
				})
			}
		}
	}
}
