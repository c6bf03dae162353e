package main

import (
	"fmt"
	"math"

	. "github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// outline is the size in bytes of a kernel.Outline, padded to whole passes.
const outline = 192 * 8

// widen takes as many directions as are in flight through all points.
func (l level) widen() {
	TEXT("widen"+l.name, NOSPLIT, "func(o, c, points *float64, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("widen%s is widenGeneric for vectors of %d lanes.", l.name, l.width))
	o, c := Load(Param("o"), GP64()), Load(Param("c"), GP64())
	points, n := Load(Param("points"), GP64()), Load(Param("n"), GP64())
	mask := l.absolute()
	wide := l
	wide.vectors = l.outlineVectors()
	span := wide.vectors * l.width * 8
	left := GP64()
	MOVQ(operand.U64(uint64(outline/span)), left)
	Label("directions")
	top, cos, sin := wide.some(), wide.coefficient(c, 0, 0, l.keep), make([]operand.Op, wide.vectors)
	for v := range top {
		VMOVUPD(l.at(o, 0, 0, v), top[v])
		sin[v] = operand.Mem{Base: c, Disp: outline + v*l.width*8}
		if l.keep {
			x := l.vector()
			VMOVUPD(sin[v], x)
			sin[v] = x
		}
	}
	p, m := GP64(), GP64()
	MOVQ(points, p)
	MOVQ(n, m)
	Label("point")
	x, y := l.vector(), l.vector()
	VBROADCASTSD(operand.Mem{Base: p}, x)
	VBROADCASTSD(operand.Mem{Base: p, Disp: 8}, y)
	for v := range top {
		t := l.vector()
		VMULPD(sin[v], y, t)
		VFMADD231PD(cos[v], x, t)
		l.and(mask, t, t)
		VMAXPD(t, top[v], top[v])
	}
	ADDQ(operand.Imm(16), p)
	DECQ(m)
	JNZ(operand.LabelRef("point"))
	for v := range top {
		VMOVUPD(top[v], l.at(o, 0, 0, v))
	}
	ADDQ(operand.U32(uint32(span)), o)
	ADDQ(operand.U32(uint32(span)), c)
	DECQ(left)
	JNZ(operand.LabelRef("directions"))
	VZEROUPPER()
	RET()
}

// outlineVectors is how many vectors of directions are in flight.
func (l level) outlineVectors() int {
	if l.keep {
		return 8
	}
	return 6
}

// above compares and collects the bits, a word at a time.
func (l level) above() {
	TEXT("above"+l.name, NOSPLIT, "func(o *float64, x float64, set *uint64)")
	Pragma("noescape")
	Doc(fmt.Sprintf("above%s is aboveGeneric for vectors of %d lanes.", l.name, l.width))
	o, set := Load(Param("o"), GP64()), Load(Param("set"), GP64())
	x, limit := XMM(), l.vector()
	Load(Param("x"), x)
	VBROADCASTSD(x, limit)
	const word = 64
	for w := range outline / 8 / word {
		sum := GP64()
		XORQ(sum, sum)
		for v := word/l.width - 1; v >= 0; v-- {
			y, bits := l.vector(), GP32()
			VMOVUPD(operand.Mem{Base: o, Disp: (w*word + v*l.width) * 8}, y)
			l.compare(y, limit, bits)
			SHLQ(operand.U8(l.width), sum)
			ORQ(bits.As64(), sum)
		}
		MOVQ(sum, operand.Mem{Base: set, Disp: w * 8})
	}
	VZEROUPPER()
	RET()
}

// exceeds collects the bits of all directions.
func (l level) exceeds() {
	TEXT("exceeds"+l.name, NOSPLIT, "func(o, c, twice, form *float64) uint64")
	Pragma("noescape")
	Doc(fmt.Sprintf("exceeds%s is exceedsGeneric for vectors of %d lanes, but for the value of what is not 0.", l.name, l.width))
	o, c := Load(Param("o"), GP64()), Load(Param("c"), GP64())
	twice, form := Load(Param("twice"), GP64()), Load(Param("form"), GP64())
	mask, zero := l.absolute(), l.vector()
	l.zero(zero)
	f := make([]reg.VecVirtual, 8)
	for i := range f {
		f[i] = l.vector()
		VBROADCASTSD(operand.Mem{Base: form, Disp: i * 8}, f[i])
	}
	sum := GP32()
	XORL(sum, sum)
	for v := range outline / 8 / l.width {
		x, p, q, bits := l.vector(), l.vector(), l.vector(), GP32()
		for i, t := range []reg.VecVirtual{p, q} {
			VMULPD(operand.Mem{Base: c, Disp: outline + v*l.width*8}, f[5+2*i], t)
			VFMADD231PD(l.at(c, 0, 0, v), f[4+2*i], t)
			l.and(mask, t, t)
		}
		VMAXPD(q, p, p)
		VMOVUPD(l.at(o, 0, 0, v), x)
		VMAXPD(f[3], x, x)
		VSUBPD(p, x, x)
		VMAXPD(zero, x, x)
		VMULPD(x, x, x)
		VMOVAPD(f[0], q)
		VFMADD231PD(l.at(twice, 0, 0, v), f[1], q)
		VFMADD231PD(operand.Mem{Base: twice, Disp: outline + v*l.width*8}, f[2], q)
		l.compare(q, x, bits)
		ORL(bits, sum)
	}
	Store(sum.As64(), ReturnIndex(0))
	VZEROUPPER()
	RET()
}

// greatestOf takes the maximum of vectors, then of the lanes of one.
func (l level) greatestOf() {
	TEXT("greatestOf"+l.name, NOSPLIT, "func(o *float64) float64")
	Pragma("noescape")
	Doc(fmt.Sprintf("greatestOf%s is greatestOfGeneric for vectors of %d lanes.", l.name, l.width))
	o := Load(Param("o"), GP64())
	sum := make([]reg.VecVirtual, 4)
	for v := range sum {
		sum[v] = l.vector()
		l.zero(sum[v])
	}
	for v := range outline / 8 / l.width {
		VMAXPD(l.at(o, 0, 0, v), sum[v%4], sum[v%4])
	}
	VMAXPD(sum[1], sum[0], sum[0])
	VMAXPD(sum[3], sum[2], sum[2])
	VMAXPD(sum[2], sum[0], sum[0])
	if l.width == 8 {
		half := YMM()
		VEXTRACTF64X4(operand.U8(1), sum[0], half)
		VMAXPD(half, sum[0].AsY(), sum[0].AsY())
	}
	x, y := sum[0].AsX(), XMM()
	VEXTRACTF128(operand.U8(1), sum[0].AsY(), y)
	VMAXPD(y, x, x)
	VPERMILPD(operand.U8(1), x, y)
	VMAXSD(y, x, x)
	Store(x, ReturnIndex(0))
	VZEROUPPER()
	RET()
}

// project takes a vector of directions through all points, without those that
// hold no lane asked for.
func (l level) project() {
	TEXT("project"+l.name, NOSPLIT, "func(rows, rays, points *float64, n int, want uint32)")
	Pragma("noescape")
	Doc(fmt.Sprintf("project%s is projectGeneric for vectors of %d lanes.", l.name, l.width))
	rows, rays := Load(Param("rows"), GP64()), Load(Param("rays"), GP64())
	points, n := Load(Param("points"), GP64()), Load(Param("n"), GP64())
	want := Load(Param("want"), GP32())
	for v := range lanes / l.width {
		next := fmt.Sprintf("skip%d", v)
		TESTL(operand.U32((1<<l.width-1)<<(v*l.width)), want)
		JZ(operand.LabelRef(next))
		cos, sin, x, y := l.vector(), l.vector(), l.vector(), l.vector()
		VMOVUPD(l.at(rays, 0, 0, v), cos)
		VMOVUPD(l.at(rays, 1, 0, v), sin)
		p, r, m := GP64(), GP64(), GP64()
		MOVQ(points, p)
		MOVQ(rows, r)
		MOVQ(n, m)
		loop := fmt.Sprintf("point%d", v)
		Label(loop)
		VBROADCASTSD(operand.Mem{Base: p}, x)
		VBROADCASTSD(operand.Mem{Base: p, Disp: 8}, y)
		VMULPD(sin, y, y)
		VFMADD231PD(cos, x, y)
		VMOVUPD(y, l.at(r, 0, 0, v))
		ADDQ(operand.Imm(16), p)
		ADDQ(operand.U32(row), r)
		DECQ(m)
		JNZ(operand.LabelRef(loop))
		Label(next)
	}
	VZEROUPPER()
	RET()
}

// fenceSides is kernel.Sides.
const fenceSides = 12

// screenFence takes a vector of lanes through all rows, without those that hold
// no lane asked for.
func (l level) screenFence() {
	TEXT("screenFence"+l.name, NOSPLIT, "func(fence, x, y *float64, every int, flags *uint32, n int, want uint32)")
	Pragma("noescape")
	Doc(fmt.Sprintf("screenFence%s is screenFenceGeneric for vectors of %d lanes.", l.name, l.width))
	fence, x, y := Load(Param("fence"), GP64()), Load(Param("x"), GP64()), Load(Param("y"), GP64())
	flags, n := Load(Param("flags"), GP64()), Load(Param("n"), GP64())
	want, every := Load(Param("want"), GP32()), Load(Param("every"), GP64())
	mask := l.absolute()
	for v := range lanes / l.width {
		next := fmt.Sprintf("skip%d", v)
		TESTL(operand.U32((1<<l.width-1)<<(v*l.width)), want)
		JZ(operand.LabelRef(next))
		l.fenceVector(fence, x, y, every, flags, n, want, v, mask)
		Label(next)
	}
	VZEROUPPER()
	RET()
}

func (l level) fenceVector(fence, x, y, every, flags, n, want reg.Register, v int, mask reg.VecVirtual) {
	xs, ys, out, left := GP64(), GP64(), GP64(), GP64()
	MOVQ(x, xs)
	MOVQ(y, ys)
	MOVQ(flags, out)
	MOVQ(n, left)
	step := rowsOf(every)
	sides := make([]operand.Op, 2*fenceSides)
	for i := range sides {
		sides[i] = l.at(fence, i, 0, v)
		if l.keep {
			c := l.vector()
			VMOVUPD(sides[i], c)
			sides[i] = c
		}
	}
	limit, bits := l.vector(), GP32()
	VMOVUPD(l.at(fence, 2*fenceSides, 0, v), limit)
	input{}.loop(fmt.Sprintf("line%d", v), out, left, nil, func() {
		u, w, top := l.vector(), l.vector(), l.vector()
		VMOVUPD(l.at(xs, 0, 0, v), u)
		VMOVUPD(l.at(ys, 0, 0, v), w)
		for k := range fenceSides {
			t := l.vector()
			if k == 0 {
				t = top
			}
			VMULPD(sides[2*k+1], w, t)
			VFMADD231PD(sides[2*k], u, t)
			l.and(mask, t, t)
			if k > 0 {
				VMAXPD(t, top, top)
			}
		}
		l.compare(top, limit, bits)
		if v > 0 {
			SHLL(operand.U8(v*l.width), bits)
		}
		ANDL(want, bits)
		ORL(bits, operand.Mem{Base: out})
		ADDQ(step, xs)
		ADDQ(step, ys)
		LEAQ(operand.Mem{Base: out, Index: every, Scale: 4, Disp: -8}, out) // the loop moves on by 8
	})
}

// rowsOf returns the bytes of so many rows.
func rowsOf(n reg.Register) reg.Register {
	bytes := GP64()
	IMUL3Q(operand.U32(row), n, bytes)
	return bytes
}

// screenOrbits takes a vector of lanes through all rows, without those that hold
// no lane with a flag.
func (l level) screenOrbits() {
	TEXT("screenOrbits"+l.name, NOSPLIT, "func(fence, x, y, groundX, groundY, lines *float64, flags *uint32, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("screenOrbits%s is screenOrbitsGeneric for vectors of %d lanes.", l.name, l.width))
	fence := Load(Param("fence"), GP64())
	zero, one, mask := l.vector(), l.constant(1), l.absolute()
	l.zero(zero)
	for v := range lanes / l.width {
		l.orbitVector(fence, v, zero, one, mask)
	}
	VZEROUPPER()
	RET()
}

func (l level) orbitVector(fence reg.Register, v int, zero, one, mask reg.VecVirtual) {
	x, y, lines := Load(Param("x"), GP64()), Load(Param("y"), GP64()), Load(Param("lines"), GP64())
	groundX, groundY := Load(Param("groundX"), GP64()), Load(Param("groundY"), GP64())
	out, left := Load(Param("flags"), GP64()), Load(Param("n"), GP64())
	bits, inner, known := GP32(), GP32(), GP32()
	within, next := fmt.Sprintf("within%d", v), fmt.Sprintf("next%d", v)
	lanes := uint32(1<<l.width-1) << (v * l.width)
	rest := func(i int) operand.Mem { return l.at(fence, 5*fenceSides+i, 0, v) } // First, Second, Inner, Level, Slope, Rise
	input{}.loop(fmt.Sprintf("line%d", v), out, left, nil, func() {
		MOVL(operand.Mem{Base: out}, known)
		TESTL(operand.U32(lanes), known)
		JZ(operand.LabelRef(next))
		xx, yy, r, s, change := l.vector(), l.vector(), l.vector(), l.vector(), l.vector()
		a, b, c, d := l.vector(), l.vector(), l.vector(), l.vector()
		VMOVUPD(l.at(x, markX, 0, v), a)
		VMOVUPD(l.at(x, markY, 0, v), b)
		VMOVUPD(l.at(y, markX, 0, v), c)
		VMOVUPD(l.at(y, markY, 0, v), d)
		VMULPD(b, b, xx)
		VFMADD231PD(a, a, xx)
		VMULPD(d, d, yy)
		VFMADD231PD(c, c, yy)
		VMOVAPD(one, r)
		VBROADCASTSD(operand.Mem{Base: lines}, s)
		VBROADCASTSD(operand.Mem{Base: lines, Disp: 8}, change)
		VFNMADD231PD(rest(0), s, r)
		VFNMADD231PD(rest(1), change, r)
		VMAXPD(zero, r, r)
		VMULPD(r, r, r)
		VADDPD(yy, xx, s)
		VMULPD(rest(2), s, s)
		l.compare(s, r, inner)
		MOVL(inner, bits)
		TESTL(inner, inner)
		JZ(operand.LabelRef(within))
		VMULPD(b, d, b) // xy
		VFMADD231PD(a, c, b)
		VMOVAPD(one, r)
		VFNMADD231PD(rest(5), change, r)
		l.middle(groundX, rest, a)
		l.middle(groundY, rest, c)
		top := d
		VMOVAPD(zero, top)
		for k := range fenceSides {
			side := func(i int) operand.Mem { return l.at(fence, 5*k+i, 0, v) } // XX, XY, YY, X, Y
			t, room := s, change
			VMULPD(side(4), c, room)
			VFMADD231PD(side(3), a, room)
			l.and(mask, room, room)
			VSUBPD(room, r, room)
			VMAXPD(zero, room, room)
			VMULPD(room, room, room)
			VMULPD(side(2), yy, t)
			VFMADD231PD(side(1), b, t)
			VFMADD231PD(side(0), xx, t)
			VSUBPD(room, t, t)
			VMAXPD(top, t, top)
		}
		l.compare(top, zero, bits)
		ANDL(inner, bits)
		if v > 0 {
			SHLL(operand.U8(v*l.width), bits)
		}
		Label(within)
		ORL(operand.U32(^lanes), bits)
		ANDL(bits, known)
		MOVL(known, operand.Mem{Base: out})
		Label(next)
		ADDQ(operand.U32(3*row), x)
		ADDQ(operand.U32(3*row), y)
		ADDQ(operand.Imm(8), groundX)
		ADDQ(operand.Imm(8), groundY)
		ADDQ(operand.Imm(16), lines)
		SUBQ(operand.Imm(4), out) // the loop moves on by 8
	})
}

// middle sets m to the middle of the straight line of a step.
func (l level) middle(ground reg.Register, rest func(int) operand.Mem, m reg.VecVirtual) {
	at, next, sum := l.vector(), l.vector(), l.vector()
	VBROADCASTSD(operand.Mem{Base: ground}, at)
	VBROADCASTSD(operand.Mem{Base: ground, Disp: 8}, next)
	VADDPD(next, at, sum)
	VSUBPD(at, next, next)
	VMULPD(rest(4), next, m)
	VFMADD231PD(rest(3), sum, m)
}

// vibrate takes a vector of lanes through all rows, without those that hold no lane
// asked for.
func (l level) vibrate() {
	TEXT("vibrate"+l.name, NOSPLIT, "func(states, q, rows, a *float64, n int, want uint32)")
	Pragma("noescape")
	Doc(fmt.Sprintf("vibrate%s is vibrateGeneric for vectors of %d lanes.", l.name, l.width))
	in := map[string]reg.Register{}
	for _, name := range []string{"states", "q", "rows", "a", "n"} {
		in[name] = Load(Param(name), GP64())
	}
	want := Load(Param("want"), GP32())
	for v := range lanes / l.width {
		next := fmt.Sprintf("skip%d", v)
		TESTL(operand.U32((1<<l.width-1)<<(v*l.width)), want)
		JZ(operand.LabelRef(next))
		l.vibrateVector(in, v)
		Label(next)
	}
	VZEROUPPER()
	RET()
}

func (l level) vibrateVector(in map[string]reg.Register, v int) {
	states, rows, a, left := GP64(), GP64(), GP64(), GP64()
	MOVQ(in["states"], states)
	MOVQ(in["rows"], rows)
	MOVQ(in["a"], a)
	MOVQ(in["n"], left)
	q := make([]reg.VecVirtual, 7) // Scale, Level, Slope, Carry, Change, Push, Bend
	for i := range q {
		q[i] = l.vector()
		VMOVUPD(l.at(in["q"], i, 0, v), q[i])
	}
	at, slope, u, change, x, y := l.vector(), l.vector(), l.vector(), l.vector(), l.vector(), l.vector()
	loop := fmt.Sprintf("row%d", v)
	Label(loop)
	VBROADCASTSD(operand.Mem{Base: a}, at)
	VBROADCASTSD(operand.Mem{Base: a, Disp: 8}, slope)
	VSUBPD(at, slope, slope)
	VMOVUPD(l.at(rows, 0, 0, v), u)
	VMOVUPD(l.at(rows, 1, 0, v), change)
	VSUBPD(u, change, change)
	VMULPD(q[1], at, x)
	VFMADD231PD(q[2], slope, x)
	VFMADD231PD(q[0], u, x)
	VMOVUPD(x, l.at(states, markX, 0, v))
	VMULPD(q[5], at, y)
	VFMADD231PD(q[6], slope, y)
	VFMADD231PD(q[3], u, y)
	VFMADD231PD(q[4], change, y)
	VMOVUPD(y, l.at(states, markY, 0, v))
	ADDQ(operand.U32(3*row), states)
	ADDQ(operand.U32(row), rows)
	ADDQ(operand.Imm(8), a)
	DECQ(left)
	JNZ(operand.LabelRef(loop))
}

// sweepCount is kernel.Sweeps.
const sweepCount = 18

// sweep takes a vector of lanes through all rows, for as many directions at once
// as registers hold.
func (l level) sweep() {
	TEXT("sweep"+l.name, NOSPLIT, "func(s, c, x, y *float64, n, every int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("sweep%s is sweepGeneric for vectors of %d lanes.", l.name, l.width))
	s, c := Load(Param("s"), GP64()), Load(Param("c"), GP64())
	x, y := Load(Param("x"), GP64()), Load(Param("y"), GP64())
	n, step := Load(Param("n"), GP64()), rowsOf(Load(Param("every"), GP64()))
	mask, tiny, count := l.absolute(), l.constant(0x1p-1022), sweepCount
	if !l.keep {
		count = 6
	}
	for v := range lanes / l.width {
		for k := 0; k < sweepCount; k += count {
			l.sweepVector(s, c, x, y, n, step, v, k, count, mask, tiny)
		}
	}
	VZEROUPPER()
	RET()
}

func (l level) sweepVector(s, c, x, y, n, step reg.Register, v, from, count int, mask, tiny reg.VecVirtual) {
	xs, ys, left := GP64(), GP64(), GP64()
	MOVQ(x, xs)
	MOVQ(y, ys)
	MOVQ(n, left)
	tops := make([]reg.VecVirtual, count)
	for k := range tops {
		tops[k] = l.vector()
		VMOVUPD(l.at(s, from+k, 0, v), tops[k])
	}
	inner := l.innerSquare(tops)
	loop, within := fmt.Sprintf("row%d_%d", v, from), fmt.Sprintf("inner%d_%d", v, from)
	Label(loop)
	u, w, square, bits := l.vector(), l.vector(), l.vector(), GP32()
	VMOVUPD(l.at(xs, 0, 0, v), u)
	VMOVUPD(l.at(ys, 0, 0, v), w)
	VMOVAPD(tiny, square)
	VFMADD231PD(w, w, square)
	VFMADD231PD(u, u, square)
	l.compare(square, inner, bits)
	TESTL(bits, bits)
	JZ(operand.LabelRef(within))
	for k := range tops {
		t := l.vector()
		VMULPD(operand.Mem{Base: c, Disp: (from+k)*128 + 64}, w, t)
		VFMADD231PD(operand.Mem{Base: c, Disp: (from + k) * 128}, u, t)
		l.and(mask, t, t)
		VMAXPD(tops[k], t, tops[k])
	}
	Label(within)
	ADDQ(step, xs)
	ADDQ(step, ys)
	DECQ(left)
	JNZ(operand.LabelRef(loop))
	for k := range tops {
		VMOVUPD(tops[k], l.at(s, from+k, 0, v))
	}
}

// innerSquare returns the square of the least of distances, less rounding: no row
// up to it can raise any of them, so that what is passed over changes no bit.
func (l level) innerSquare(tops []reg.VecVirtual) reg.VecVirtual {
	inner := l.vector()
	VMOVAPD(tops[0], inner)
	for _, top := range tops[1:] {
		VMINPD(top, inner, inner)
	}
	VMULPD(inner, inner, inner)
	VMULPD(l.constant(1-0x1p-40), inner, inner)
	VMINPD(l.constant(math.MaxFloat64), inner, inner)
	return inner
}

// displace takes all lanes of a row at a time.
func (l level) displace() {
	TEXT("displace"+l.name, NOSPLIT, "func(rows, q, states, a *float64, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("displace%s is displaceGeneric for vectors of %d lanes.", l.name, l.width))
	rows, q := Load(Param("rows"), GP64()), Load(Param("q"), GP64())
	states, a := Load(Param("states"), GP64()), Load(Param("a"), GP64())
	n := Load(Param("n"), GP64())
	at, next, x := l.vector(), l.vector(), l.vector()
	Label("row")
	VBROADCASTSD(operand.Mem{Base: a}, at)
	VBROADCASTSD(operand.Mem{Base: a, Disp: 8}, next)
	VSUBPD(at, next, next)
	for v := range lanes / l.width {
		VMULPD(l.at(q, 2, 0, v), at, x)
		VFMADD231PD(l.at(q, 1, 0, v), next, x)
		y := l.vector()
		VMOVUPD(l.at(states, markX, 0, v), y)
		VFMADD231PD(l.at(q, 0, 0, v), y, x)
		VMOVUPD(x, l.at(rows, 0, 0, v))
	}
	ADDQ(operand.U32(row), rows)
	ADDQ(operand.U32(3*row), states)
	ADDQ(operand.Imm(8), a)
	DECQ(n)
	JNZ(operand.LabelRef("row"))
	VZEROUPPER()
	RET()
}
