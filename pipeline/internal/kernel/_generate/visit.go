package main

import (
	"fmt"

	. "github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// traceEach is traceSlow with a ground for each lane.
func (l level) traceEach() {
	TEXT("traceEach"+l.name, NOSPLIT, "func(q, from, ground *float64, steps int, rows *float64)")
	Pragma("noescape")
	Doc(fmt.Sprintf("traceEach%s is traceEachGeneric for vectors of %d lanes.", l.name, l.width))
	q, from := Load(Param("q"), GP64()), Load(Param("from"), GP64())
	ground, steps, rows := Load(Param("ground"), GP64()), Load(Param("steps"), GP64()), Load(Param("rows"), GP64())
	l.passes(func(offset, pass int) {
		a, n, out := GP64(), GP64(), GP64()
		MOVQ(ground, a)
		MOVQ(steps, n)
		MOVQ(rows, out)
		u, w := l.some(), l.some()
		for v := range u {
			VMOVUPD(l.at(from, markX, offset, v), u[v])
			VMOVUPD(l.at(from, markY, offset, v), w[v])
		}
		decay := l.coefficient(q, slowDecay, offset, l.keep)
		stiffness := l.coefficient(q, slowStiffness, offset, l.keep)
		middle := l.coefficient(q, slowMiddle, offset, true)
		oldest := l.coefficient(q, slowOldest, offset, l.keep)
		step := fmt.Sprintf("step%d", pass)
		Label(step)
		for v := range u {
			t := l.vector()
			VMOVUPD(l.at(a, 2, offset, v), t)
			VFMADD231PD(l.at(a, 1, offset, v), middle[v].(reg.VecVirtual), t)
			if l.keep {
				VFMADD231PD(l.at(a, 0, offset, v), oldest[v].(reg.VecVirtual), t)
			} else {
				x := l.vector()
				VMOVUPD(l.at(a, 0, offset, v), x)
				VFMADD231PD(oldest[v], x, t)
			}
			VFMADD132PD(decay[v], t, w[v])
			VFNMADD231PD(stiffness[v], u[v], w[v])
			VADDPD(w[v], u[v], u[v])
			VMOVUPD(u[v], l.at(out, 0, offset, v))
		}
		ADDQ(operand.U32(row), a)
		ADDQ(operand.U32(row), out)
		DECQ(n)
		JNZ(operand.LabelRef(step))
	})
	VZEROUPPER()
	RET()
}

// traceFastEach is traceFast with a ground for each lane, of which it forms the
// numbers of the steps, and with displacements in place of squares.
func (l level) traceFastEach() {
	TEXT("traceFastEach"+l.name, NOSPLIT, "func(q, phase, from, ground *float64, steps int, rows *float64)")
	Pragma("noescape")
	Doc(fmt.Sprintf("traceFastEach%s is traceFastEachGeneric for vectors of %d lanes.", l.name, l.width))
	q, phase, from := Load(Param("q"), GP64()), Load(Param("phase"), GP64()), Load(Param("from"), GP64())
	ground, steps, rows := Load(Param("ground"), GP64()), Load(Param("steps"), GP64()), Load(Param("rows"), GP64())
	wide := l
	if !l.keep {
		wide.vectors = 2
	}
	wide.passes(func(offset, pass int) {
		a, n, out := GP64(), GP64(), GP64()
		MOVQ(ground, a)
		MOVQ(steps, n)
		MOVQ(rows, out)
		y, z, slope := wide.some(), wide.some(), wide.some()
		for v := range y {
			VMOVUPD(l.at(from, markX, offset, v), y[v])
			VMOVUPD(l.at(from, markY, offset, v), z[v])
			VMOVUPD(l.at(a, 1, offset, v), slope[v])
			VSUBPD(l.at(a, 0, offset, v), slope[v], slope[v])
		}
		step := fmt.Sprintf("step%d", pass)
		Label(step)
		for v := range y {
			c := func(r int) operand.Mem { return l.at(q, r, offset, v) }
			x, b, s, t := l.vector(), l.vector(), l.vector(), l.vector()
			VMOVUPD(y[v], l.at(out, markX, offset, v))
			VMOVUPD(z[v], l.at(out, markY, offset, v))
			VMOVAPD(y[v], x)
			VFMADD231PD(c(fastJump), slope[v], x)
			VMOVUPD(l.at(a, 0, offset, v), t)
			VFNMADD231PD(l.at(phase, 0, offset, v), t, x)
			VMOVUPD(x, l.at(out, markPeak, offset, v))
			VMOVUPD(l.at(a, 2, offset, v), x)
			VSUBPD(l.at(a, 1, offset, v), x, x)
			VSUBPD(slope[v], x, b)
			VMOVAPD(x, slope[v])
			VMULPD(c(fastJump), b, s)
			VFMSUB231PD(c(fastYZ), z[v], s)
			VFMADD231PD(c(fastZZ), z[v], b)
			VFMADD231PD(c(fastZY), y[v], b)
			VFMADD132PD(c(fastYY), s, y[v])
			VMOVAPD(b, z[v])
		}
		ADDQ(operand.U32(row), a)
		ADDQ(operand.U32(3*row), out)
		DECQ(n)
		JNZ(operand.LabelRef(step))
	})
	VZEROUPPER()
	RET()
}

// screenFast compares what displacements can reach within steps with a limit.
func (l level) screenFast() {
	TEXT("screenFast"+l.name, NOSPLIT, "func(s, rows, ground *float64, flags *uint32, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("screenFast%s is screenFastGeneric for vectors of %d lanes.", l.name, l.width))
	s, rows, ground := Load(Param("s"), GP64()), Load(Param("rows"), GP64()), Load(Param("ground"), GP64())
	flags, n := Load(Param("flags"), GP64()), Load(Param("n"), GP64())
	mask, zero, half, share := l.absolute(), l.vector(), l.constant(0.5), l.constant(diagonal)
	l.zero(zero)
	bits, also, sum := GP32(), GP32(), GP32()
	input{}.loop("step", flags, n, nil, func() {
		XORL(sum, sum)
		for v := lanes/l.width - 1; v >= 0; v-- {
			x, d, top, t := l.vector(), l.vector(), l.vector(), l.vector()
			VMOVUPD(l.at(rows, markPeak, 0, v), x)
			VMOVUPD(l.at(rows, 3+markPeak, 0, v), top)
			VSUBPD(x, top, d)
			l.and(mask, d, d)
			l.and(mask, top, top)
			l.and(mask, x, t)
			VMAXPD(top, t, top) // the greater end
			size, y := l.vector(), l.vector()
			l.and(l.at(rows, markX, 0, v), mask, y)
			l.and(l.at(rows, markY, 0, v), mask, t)
			VMAXPD(t, y, size)
			VMINPD(t, y, t)
			VFMADD231PD(share, t, size)
			line := l.vector()
			VSUBPD(l.at(rows, markX, 0, v), x, line)
			VMOVUPD(l.at(ground, 1, 0, v), t)
			VSUBPD(l.at(ground, 0, 0, v), t, t)
			VMOVAPD(line, y)
			VFNMADD231PD(l.at(s, 2, 0, v), t, y)
			l.and(mask, line, line)
			l.and(mask, y, y)
			VMAXPD(y, line, y)
			VADDPD(size, y, y)
			m := l.vector()
			VMULPD(l.at(s, 1, 0, v), size, m)
			VFMSUB231PD(half, m, d) // what the displacement can exceed the chord by: half·m − d
			VMAXPD(zero, d, d)
			VMULPD(d, d, d)
			limit := l.vector()
			VMOVUPD(l.at(s, 0, 0, v), limit)
			VSUBPD(top, limit, top)
			VADDPD(m, m, m)
			VMULPD(top, m, m)
			l.compare(y, limit, also)
			l.compare(d, m, bits)
			ANDL(also, bits)
			SHLL(operand.U8(l.width), sum)
			ORL(bits, sum)
		}
		MOVL(sum, operand.Mem{Base: flags})
		ADDQ(operand.U32(3*row), rows)
		ADDQ(operand.U32(row), ground)
		SUBQ(operand.Imm(4), flags) // the loop moves on by 8
	})
	VZEROUPPER()
	RET()
}

// diagonal is kernel.diagonal.
const diagonal = 0.4142135623730951

// gather turns a square of as many lanes as samples at a time.
func (l level) gather() {
	TEXT("gather"+l.name, NOSPLIT, "func(rows, a *float64, from *int, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("gather%s is gatherGeneric for vectors of %d lanes.", l.name, l.width))
	rows, a := Load(Param("rows"), GP64()), Load(Param("a"), GP64())
	from, n := Load(Param("from"), GP64()), Load(Param("n"), GP64())
	left := GP64()
	columns := make([]reg.Register, l.width)
	for i := range columns {
		columns[i] = GP64()
	}
	for v := range lanes / l.width {
		for i := range columns {
			MOVQ(operand.Mem{Base: from, Disp: (v*l.width + i) * 8}, columns[i])
			LEAQ(operand.Mem{Base: a, Index: columns[i], Scale: 8}, columns[i])
		}
		MOVQ(n, left)
		square := fmt.Sprintf("square%d", v)
		Label(square)
		list := make([]reg.VecVirtual, l.width)
		for i := range list {
			list[i] = l.vector()
			VMOVUPD(operand.Mem{Base: columns[i]}, list[i])
			ADDQ(operand.Imm(uint64(l.width*8)), columns[i])
		}
		for i, x := range l.transpose(list) {
			VMOVUPD(x, l.at(rows, i, 0, v))
		}
		ADDQ(operand.U32(uint32(l.width*row)), rows)
		SUBQ(operand.Imm(uint64(l.width)), left)
		JNZ(operand.LabelRef(square))
		Load(Param("rows"), rows)
	}
	VZEROUPPER()
	RET()
}

// transpose returns the columns of rows.
func (l level) transpose(rows []reg.VecVirtual) []reg.VecVirtual {
	even, odd := make([]reg.VecVirtual, l.width/2), make([]reg.VecVirtual, l.width/2)
	for i := range even {
		even[i], odd[i] = l.vector(), l.vector()
		VUNPCKLPD(rows[2*i+1], rows[2*i], even[i])
		VUNPCKHPD(rows[2*i+1], rows[2*i], odd[i])
	}
	columns := make([]reg.VecVirtual, l.width)
	for parity, x := range [][]reg.VecVirtual{even, odd} {
		if l.width == 4 {
			columns[parity], columns[parity+2] = l.vector(), l.vector()
			VPERM2F128(operand.U8(0x20), x[1], x[0], columns[parity])
			VPERM2F128(operand.U8(0x31), x[1], x[0], columns[parity+2])
			continue
		}
		// Pairs 0 and 2 of both, 1 and 3 of both, and those of these.
		shuffle := func(pairs uint8, x, y reg.VecVirtual) reg.VecVirtual {
			z := l.vector()
			VSHUFF64X2(operand.U8(pairs), y, x, z)
			return z
		}
		for half, pairs := range []uint8{0x88, 0xdd} {
			low, high := shuffle(pairs, x[0], x[1]), shuffle(pairs, x[2], x[3])
			columns[parity+2*half] = shuffle(0x88, low, high)
			columns[parity+2*half+4] = shuffle(0xdd, low, high)
		}
	}
	return columns
}

// Rows of a kernel.Turning.
const (
	turnU, turnV, turnForce, turnRise, turnLinear, turnSquare = 0, 1, 2, 3, 4, 5
	turnTop, turnTime, turnMove, turnVelocity, turnBend       = 6, 7, 8, 9, 10
	turnC                                                     = 11
	turnPasses                                                = 3 // kernel.turnPasses
)

// turn finds turning points.
func (l level) turn() {
	TEXT("turn"+l.name, NOSPLIT, "func(t, factors *float64, terms int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("turn%s is turnGeneric for vectors of %d lanes.", l.name, l.width))
	in := turning{t: Load(Param("t"), GP64()), factors: Load(Param("factors"), GP64()), terms: Load(Param("terms"), GP64())}
	in.mask, in.one, in.zero = l.absolute(), l.constant(1), l.vector()
	l.zero(in.zero)
	wide := l
	if !l.keep {
		wide.vectors = 2
	}
	in.last = GP64() // of the coefficients
	MOVQ(in.terms, in.last)
	SHLQ(operand.U8(8), in.last) // rows have 256 bytes
	ADDQ(in.t, in.last)
	wide.passes(func(offset, pass int) {
		in.name = fmt.Sprint(pass)
		d, j := wide.expand(in, offset)
		wide.endOf(in, offset)
		t := wide.parabola(in, offset, d, j)
		for i := range turnPasses {
			wide.correct(in, offset, t, i)
		}
	})
	VZEROUPPER()
	RET()
}

type turning struct {
	t, factors, terms, last reg.Register
	mask, one, zero         reg.VecVirtual
	name                    string // of the pass
}

// expand stores the coefficients and returns ü and its derivative.
func (l level) expand(in turning, offset int) (second, third []reg.VecVirtual) {
	second, third = l.some(), l.some()
	d, j := l.some(), l.some()
	for v := range d {
		at := func(r int) operand.Mem { return l.at(in.t, r, offset, v) }
		x, y := l.vector(), l.vector()
		VMOVUPD(at(turnU), x)
		VMOVUPD(at(turnV), y)
		VMOVUPD(x, at(turnC))
		VMOVUPD(y, at(turnC+1))
		VMOVUPD(at(turnForce), d[v])
		VFNMADD231PD(at(turnSquare), x, d[v])
		VFNMADD231PD(at(turnLinear), y, d[v])
		VMOVUPD(at(turnRise), j[v])
		VFNMADD231PD(at(turnSquare), y, j[v])
		VFNMADD231PD(at(turnLinear), d[v], j[v])
		VMOVAPD(d[v], second[v])
		VMOVAPD(j[v], third[v])
		VMULPD(l.at(in.factors, 2, offset, v), d[v], x)
		VMOVUPD(x, at(turnC+2))
		VMULPD(l.at(in.factors, 3, offset, v), j[v], x)
		VMOVUPD(x, at(turnC+3))
	}
	factor, to, left := GP64(), GP64(), GP64()
	LEAQ(operand.Mem{Base: in.factors, Disp: 4 * row}, factor)
	LEAQ(operand.Mem{Base: in.t, Disp: (turnC + 4) * row}, to)
	MOVQ(in.terms, left)
	SUBQ(operand.Imm(4), left)
	label := "term" + in.name
	Label(label)
	for v := range d {
		x := l.vector()
		VMULPD(l.at(in.t, turnSquare, offset, v), d[v], x)
		VFNMSUB231PD(l.at(in.t, turnLinear, offset, v), j[v], x)
		VMOVAPD(j[v], d[v])
		VMOVAPD(x, j[v])
		VMULPD(l.at(factor, 0, offset, v), x, x)
		VMOVUPD(x, l.at(to, 0, offset, v))
	}
	ADDQ(operand.U32(row), factor)
	ADDQ(operand.U32(row), to)
	DECQ(left)
	JNZ(operand.LabelRef(label))
	return second, third
}

// horner runs body for the coefficients from the last to the first.
func (l level) horner(in turning, name string, body func(c reg.Register)) {
	c, left := GP64(), GP64()
	MOVQ(in.last, c)
	MOVQ(in.terms, left)
	label := name + in.name
	Label(label)
	body(c)
	SUBQ(operand.U32(row), c)
	DECQ(left)
	JNZ(operand.LabelRef(label))
}

// endOf stores velocity and bend at t = 1.
func (l level) endOf(in turning, offset int) {
	u, v, w := l.some(), l.some(), l.some()
	for i := range u {
		VMOVAPD(in.zero, u[i])
		VMOVAPD(in.zero, v[i])
		VMOVAPD(in.zero, w[i])
	}
	l.horner(in, "end", func(c reg.Register) {
		for i := range u {
			VADDPD(v[i], w[i], w[i])
			VADDPD(u[i], v[i], v[i])
			VADDPD(l.at(c, turnC-1, offset, i), u[i], u[i])
		}
	})
	for i := range u {
		VMOVUPD(v[i], l.at(in.t, turnVelocity, offset, i))
		VMOVUPD(w[i], l.at(in.t, turnBend, offset, i))
	}
}

// parabola returns the first guess of a zero.
func (l level) parabola(in turning, offset int, second, third []reg.VecVirtual) []reg.VecVirtual {
	list := l.some()
	for i, t := range list {
		x, y, sign := l.vector(), l.vector(), l.vector()
		VMOVUPD(l.at(in.t, turnV, offset, i), x)
		VADDPD(third[i], third[i], y)
		VMULPD(x, y, y)
		VFMSUB231PD(second[i], second[i], y)
		VMAXPD(in.zero, y, y)
		VSQRTPD(y, y)
		l.andNot(in.mask, second[i], sign)
		l.or(sign, y, y)
		VADDPD(y, second[i], y)
		VADDPD(x, x, x)
		VDIVPD(y, x, x)
		VSUBPD(x, in.zero, t)
		l.clamp(in, t)
	}
	return list
}

// clamp keeps t between 0 and 1, NaN at 0.
func (l level) clamp(in turning, t reg.VecVirtual) {
	VMAXPD(in.zero, t, t)
	VMINPD(in.one, t, t)
}

// correct makes one of Newton's corrections of t.
func (l level) correct(in turning, offset int, t []reg.VecVirtual, number int) {
	u, v, w := l.some(), l.some(), l.some()
	for i := range u {
		VMOVAPD(in.zero, u[i])
		VMOVAPD(in.zero, v[i])
		VMOVAPD(in.zero, w[i])
	}
	l.horner(in, fmt.Sprintf("correct%d_", number), func(c reg.Register) {
		for i := range u {
			VFMADD213PD(v[i], t[i], w[i])
			VFMADD213PD(u[i], t[i], v[i])
			VFMADD213PD(l.at(c, turnC-1, offset, i), t[i], u[i])
		}
	})
	for i := range u {
		move := l.vector()
		VADDPD(w[i], w[i], move)
		VDIVPD(move, v[i], move)
		VSUBPD(move, t[i], t[i])
		if number < turnPasses-1 {
			l.clamp(in, t[i])
			continue
		}
		VMOVUPD(t[i], l.at(in.t, turnTime, offset, i))
		VMOVUPD(move, l.at(in.t, turnMove, offset, i))
		VFNMADD213PD(v[i], move, w[i])
		VFNMADD231PD(w[i], move, u[i])
		VMOVUPD(u[i], l.at(in.t, turnTop, offset, i))
	}
}

// andNot puts y AND NOT x into z, or puts x OR y.
func (l level) andNot(x, y, z operand.Op) {
	if l.width == 8 {
		VPANDNQ(y, x, z)
	} else {
		VPANDN(y, x, z)
	}
}

func (l level) or(x, y, z operand.Op) {
	if l.width == 8 {
		VPORQ(x, y, z)
	} else {
		VPOR(x, y, z)
	}
}
