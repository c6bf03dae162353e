// Command generate writes the assembly of package kernel and its Go stubs:
//
//	go run . -out ../kernel_amd64.s -stubs ../kernel_amd64.go -pkg kernel
//
// Blocks are pointed to by their first number, because this module does not see
// their types. Every kernel is written once for both widths of vector. What differs is the
// number of lanes a vector holds, the number of registers there are, and how
// lanes are compared.
package main

import (
	"fmt"

	. "github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// lanes is kernel.Lanes; row is the size in bytes of one number for each.
const (
	lanes = 32
	row   = lanes * 8

	inputCount = 11     // kernel.Inputs
	inputRow   = 16 * 8 // bytes of one kernel.Input
)

// level is a width of vector.
type level struct {
	name    string
	width   int  // lanes of a vector
	vectors int  // vectors in flight: four hide the latency of a step
	keep    bool // whether registers suffice for coefficients
}

var levels = []level{{"AVX2", 4, 4, false}, {"AVX512", 8, 4, true}}

func main() {
	ConstraintExpr("!noasm")
	for _, l := range levels {
		l.marchSlow(false)
		l.marchSlow(true)
		l.marchFast(false)
		l.marchFast(true)
		l.screen(false)
		l.screen(true)
		l.screenSteps()
		l.marchStride()
		l.mix()
		l.greatest()
	}
	Generate()
}

func (l level) vector() reg.VecVirtual {
	if l.width == 8 {
		return ZMM()
	}
	return YMM()
}

func (l level) some() []reg.VecVirtual {
	list := make([]reg.VecVirtual, l.vectors)
	for i := range list {
		list[i] = l.vector()
	}
	return list
}

// absolute returns a register that holds everything but sign bits.
func (l level) absolute() reg.VecVirtual {
	mask := l.vector()
	if l.width == 8 {
		VPTERNLOGQ(operand.U8(0xff), mask, mask, mask)
	} else {
		VPCMPEQQ(mask, mask, mask)
	}
	VPSRLQ(operand.U8(1), mask, mask)
	return mask
}

// and puts x AND y into z. The integer form needs nothing beyond the base set
// of the wide vectors.
func (l level) and(x, y, z operand.Op) {
	if l.width == 8 {
		VPANDQ(x, y, z)
	} else {
		VPAND(x, y, z)
	}
}

func (l level) zero(x reg.VecVirtual) {
	if l.width == 8 {
		VPXORQ(x, x, x)
	} else {
		VPXOR(x, x, x)
	}
}

// passes repeats body for as many lanes as are in flight, with the byte offset
// of the first. Pointers to rows are moved on by step.
func (l level) passes(body func(offset, pass int)) {
	for pass := range lanes / (l.width * l.vectors) {
		body(pass*l.width*l.vectors*8, pass)
	}
}

// at is element i of vectors that begin at row r of a block.
func (l level) at(base reg.Register, r, offset, v int) operand.Mem {
	return operand.Mem{Base: base, Disp: r*row + offset + v*l.width*8}
}

// coefficient is row r of a block, in registers where they suffice.
func (l level) coefficient(base reg.Register, r, offset int, keep bool) []operand.Op {
	list := make([]operand.Op, l.vectors)
	for v := range list {
		list[v] = l.at(base, r, offset, v)
		if keep {
			x := l.vector()
			VMOVUPD(list[v], x)
			list[v] = x
		}
	}
	return list
}

// input is what a march reads: pointers to coefficients, states and ground, the
// number of steps, and where a trace goes.
type input struct{ q, from, to, ground, steps, rows, want reg.Register }

func (l level) open(form string, trace bool) input {
	kind, result := "march", "from, to, ground *float64, steps int"
	if trace {
		kind, result = "trace", "from, ground *float64, steps int, rows *float64, want uint32"
	}
	TEXT(kind+form+l.name, NOSPLIT, "func(q, "+result+")")
	Pragma("noescape")
	in := input{
		q: Load(Param("q"), GP64()), from: Load(Param("from"), GP64()),
		ground: Load(Param("ground"), GP64()), steps: Load(Param("steps"), GP64()),
	}
	Doc(fmt.Sprintf("%s%s%s is %s%sGeneric for vectors of %d lanes.", kind, form, l.name, kind, form, l.width))
	if trace {
		in.rows = Load(Param("rows"), GP64())
		in.want = Load(Param("want"), GP32())
	} else {
		in.to = Load(Param("to"), GP64())
	}
	return in
}

// loop runs body for each step, with the ground moved on by one sample, and for
// each row of a trace.
func (in input) loop(name string, ground, steps, rows reg.Register, body func()) {
	TESTQ(steps, steps)
	JLE(operand.LabelRef(name + "_done"))
	Label(name)
	body()
	ADDQ(operand.Imm(8), ground)
	if rows != nil {
		ADDQ(operand.U32(row), rows)
	}
	DECQ(steps)
	JNZ(operand.LabelRef(name))
	Label(name + "_done")
}

// skip passes over a pass of a trace without a lane that is asked for.
func (l level) skip(in input, pass int, body func()) {
	if in.rows == nil {
		body()
		return
	}
	count := l.width * l.vectors
	next := fmt.Sprintf("skip%d", pass)
	TESTL(operand.U32((1<<count-1)<<(pass*count)), in.want)
	JZ(operand.LabelRef(next))
	body()
	Label(next)
}

// cursors copies the registers that a pass moves.
func (in input) cursors() (ground, steps, rows reg.Register) {
	g, n := GP64(), GP64()
	MOVQ(in.ground, g)
	MOVQ(in.steps, n)
	if in.rows == nil {
		return g, n, nil
	}
	r := GP64()
	MOVQ(in.rows, r)
	return g, n, r
}

// Rows of the blocks, in the order of their fields.
const (
	slowDecay, slowStiffness, slowMiddle, slowOldest = 0, 1, 2, 3
	fastYY, fastYZ, fastZY, fastZZ, fastJump         = 0, 1, 2, 3, 4
	markX, markY, markPeak                           = 0, 1, 2
)

func (l level) marchSlow(trace bool) {
	in := l.open("Slow", trace)
	mask := l.absolute()
	l.passes(func(offset, pass int) {
		l.skip(in, pass, func() { l.slowPass(in, offset, pass, mask) })
	})
	VZEROUPPER()
	RET()
}

func (l level) slowPass(in input, offset, pass int, mask reg.VecVirtual) {
	trace := in.rows != nil
	ground, steps, rows := in.cursors()
	u, w, peak := l.some(), l.some(), l.some()
	for v := range u {
		VMOVUPD(l.at(in.from, markX, offset, v), u[v])
		VMOVUPD(l.at(in.from, markY, offset, v), w[v])
		if !trace {
			l.and(mask, u[v], peak[v])
		}
	}
	decay := l.coefficient(in.q, slowDecay, offset, l.keep)
	stiffness := l.coefficient(in.q, slowStiffness, offset, l.keep)
	middle := l.coefficient(in.q, slowMiddle, offset, l.keep)
	oldest := l.coefficient(in.q, slowOldest, offset, l.keep)
	x, y := l.vector(), l.vector()
	VBROADCASTSD(operand.Mem{Base: ground}, x)
	VBROADCASTSD(operand.Mem{Base: ground, Disp: 8}, y)
	newest := operand.Mem{Base: ground, Disp: 16}
	in.loop(fmt.Sprintf("step%d", pass), ground, steps, rows, func() {
		for v := range u {
			t := l.vector()
			VBROADCASTSD(newest, t)
			VFMADD231PD(middle[v], y, t)
			VFMADD231PD(oldest[v], x, t)
			VFMADD132PD(decay[v], t, w[v])
			VFNMADD231PD(stiffness[v], u[v], w[v])
			VADDPD(w[v], u[v], u[v])
			if trace {
				VMOVUPD(u[v], l.at(rows, 0, offset, v))
			} else {
				l.and(mask, u[v], t)
				VMAXPD(t, peak[v], peak[v])
			}
		}
		VMOVAPD(y, x)
		VBROADCASTSD(newest, y)
	})
	if !trace {
		l.leave(in, offset, u, w, peak)
	}
}

func (l level) leave(in input, offset int, x, y, peak []reg.VecVirtual) {
	for v := range x {
		VMOVUPD(peak[v], l.at(in.from, markPeak, offset, v))
		VMOVUPD(x[v], l.at(in.to, markX, offset, v))
		VMOVUPD(y[v], l.at(in.to, markY, offset, v))
	}
}

func (l level) marchFast(trace bool) {
	in := l.open("Fast", trace)
	l.passes(func(offset, pass int) {
		l.skip(in, pass, func() { l.fastPass(in, offset, pass) })
	})
	VZEROUPPER()
	RET()
}

func (l level) fastPass(in input, offset, pass int) {
	trace := in.rows != nil
	ground, steps, rows := in.cursors()
	y, z, peak := l.some(), l.some(), l.some()
	for v := range y {
		VMOVUPD(l.at(in.from, markX, offset, v), y[v])
		VMOVUPD(l.at(in.from, markY, offset, v), z[v])
		if !trace {
			l.zero(peak[v])
		}
	}
	yy := l.coefficient(in.q, fastYY, offset, l.keep)
	yz := l.coefficient(in.q, fastYZ, offset, l.keep)
	zy := l.coefficient(in.q, fastZY, offset, l.keep)
	zz := l.coefficient(in.q, fastZZ, offset, l.keep)
	jump := l.coefficient(in.q, fastJump, offset, false)
	bend := l.vector()
	in.loop(fmt.Sprintf("step%d", pass), ground, steps, rows, func() {
		VBROADCASTSD(operand.Mem{Base: ground}, bend)
		for v := range y {
			t := l.vector()
			VMULPD(z[v], z[v], t)
			VFMADD231PD(y[v], y[v], t)
			if trace {
				VMOVUPD(y[v], l.at(rows, markX, offset, v))
				VMOVUPD(z[v], l.at(rows, markY, offset, v))
				VMOVUPD(t, l.at(rows, markPeak, offset, v))
			} else {
				VMAXPD(t, peak[v], peak[v])
			}
			s := l.vector()
			VMULPD(jump[v], bend, s)
			VFMSUB231PD(yz[v], z[v], s)
			VMOVAPD(bend, t)
			VFMADD231PD(zz[v], z[v], t)
			VFMADD231PD(zy[v], y[v], t)
			VFMADD132PD(yy[v], s, y[v])
			VMOVAPD(t, z[v])
		}
		if trace {
			ADDQ(operand.U32(2*row), rows) // and the loop one more
		}
	})
	if !trace {
		l.leave(in, offset, y, z, peak)
	}
}

// screen compares rows that are stride bytes apart with a limit that falls with
// two numbers of each.
func (l level) screen(squared bool) {
	name := "screen"
	if squared {
		name = "screenSquares"
	}
	TEXT(name+l.name, NOSPLIT, "func(s, values *float64, stride int, lines *float64, flags *uint32, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("%s%s is %sGeneric for vectors of %d lanes.", name, l.name, name, l.width))
	s, values := Load(Param("s"), GP64()), Load(Param("values"), GP64())
	stride, lines := Load(Param("stride"), GP64()), Load(Param("lines"), GP64())
	flags, n := Load(Param("flags"), GP64()), Load(Param("n"), GP64())
	mask := l.absolute()
	zero := l.vector()
	l.zero(zero)
	first, second := l.vector(), l.vector()
	bits, sum := GP32(), GP32()
	input{}.loop("line", flags, n, nil, func() {
		VBROADCASTSD(operand.Mem{Base: lines}, first)
		VBROADCASTSD(operand.Mem{Base: lines, Disp: 8}, second)
		XORL(sum, sum)
		for v := lanes/l.width - 1; v >= 0; v-- {
			r, x := l.vector(), l.vector()
			VMOVUPD(l.at(s, 0, 0, v), r)
			VFNMADD231PD(l.at(s, 1, 0, v), first, r)
			VFNMADD231PD(l.at(s, 2, 0, v), second, r)
			if squared {
				VMAXPD(zero, r, r)
				VMULPD(r, r, r)
			}
			l.and(l.at(values, 0, 0, v), mask, x)
			l.compare(x, r, bits)
			SHLL(operand.U8(l.width), sum)
			ORL(bits, sum)
		}
		MOVL(sum, operand.Mem{Base: flags})
		ADDQ(stride, values)
		ADDQ(operand.Imm(16), lines)
		SUBQ(operand.Imm(4), flags) // the loop moves on by 8
	})
	VZEROUPPER()
	RET()
}

// greatest takes the maximum of rows that are stride bytes apart.
func (l level) greatest() {
	TEXT("greatest"+l.name, NOSPLIT, "func(top, values *float64, stride, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("greatest%s is greatestGeneric for vectors of %d lanes.", l.name, l.width))
	top, values := Load(Param("top"), GP64()), Load(Param("values"), GP64())
	stride, n := Load(Param("stride"), GP64()), Load(Param("n"), GP64())
	sum := make([]reg.VecVirtual, lanes/l.width)
	for v := range sum {
		sum[v] = l.vector()
		l.zero(sum[v])
	}
	Label("line")
	for v := range sum {
		VMAXPD(l.at(values, 0, 0, v), sum[v], sum[v])
	}
	ADDQ(stride, values)
	DECQ(n)
	JNZ(operand.LabelRef("line"))
	for v := range sum {
		VMOVUPD(sum[v], l.at(top, 0, 0, v))
	}
	VZEROUPPER()
	RET()
}

// compare sets bits to one bit for each lane, whether x > r.
func (l level) compare(x, r reg.VecVirtual, bits reg.Register) {
	const greater = 14 // ordered, signalling
	if l.width == 8 {
		k := K()
		VCMPPD(operand.U8(greater), r, x, k)
		KMOVW(k, bits)
	} else {
		VCMPPD(operand.U8(greater), r, x, x)
		VMOVMSKPD(x, bits)
	}
}

// screenSteps compares what a step can reach with the best known, a vector at a
// time, without those that hold no lane asked for.
func (l level) screenSteps() {
	TEXT("screenSteps"+l.name, NOSPLIT, "func(s, rows, lines *float64, flags *uint32, n int, want uint32)")
	Pragma("noescape")
	Doc(fmt.Sprintf("screenSteps%s is screenStepsGeneric for vectors of %d lanes.", l.name, l.width))
	s := Load(Param("s"), GP64())
	in := map[string]reg.Register{}
	for _, name := range []string{"rows", "lines", "flags", "n"} {
		in[name] = Load(Param(name), GP64())
	}
	want := Load(Param("want"), GP32())
	mask, zero, half := l.absolute(), l.vector(), l.vector()
	l.zero(zero)
	word, x := GP64(), XMM()
	MOVQ(operand.U64(0x3fe0000000000000), word) // 0.5
	VMOVQ(word, x)
	VBROADCASTSD(x, half)
	for v := range lanes / l.width {
		next := fmt.Sprintf("skip%d", v)
		TESTL(operand.U32((1<<l.width-1)<<(v*l.width)), want)
		JZ(operand.LabelRef(next))
		l.screenVector(s, in, want, v, mask, zero, half)
		Label(next)
	}
	VZEROUPPER()
	RET()
}

func (l level) screenVector(s reg.Register, in map[string]reg.Register, want reg.Register, v int, mask, zero, half reg.VecVirtual) {
	rows, lines, flags, n := GP64(), GP64(), GP64(), GP64()
	MOVQ(in["rows"], rows)
	MOVQ(in["lines"], lines)
	MOVQ(in["flags"], flags)
	MOVQ(in["n"], n)
	var c [4]reg.VecVirtual
	for i := range c {
		c[i] = l.vector()
		VMOVUPD(l.at(s, i, 0, v), c[i])
	}
	best, force, curve, slope := c[0], c[1], c[2], c[3]
	u, bits := l.vector(), GP32()
	VMOVUPD(l.at(rows, 0, 0, v), u)
	input{}.loop(fmt.Sprintf("line%d", v), flags, n, nil, func() {
		end, d, m := l.vector(), l.vector(), l.vector()
		VMOVUPD(l.at(rows, 1, 0, v), end)
		VSUBPD(u, end, d)
		l.and(mask, d, d)
		l.and(mask, u, u)
		top := l.vector()
		l.and(mask, end, top)
		VMAXPD(top, u, top) // the greater end
		VMOVAPD(end, u)
		VBROADCASTSD(operand.Mem{Base: lines}, m)
		VMULPD(force, m, m)
		VFMADD231PD(curve, top, m)
		VFMADD231PD(slope, d, m) // the curvature
		VFMSUB231PD(half, m, d)  // what u can exceed the chord by: half·m − d
		VMAXPD(zero, d, d)
		VMULPD(d, d, d)
		VSUBPD(top, best, top) // what is missing to best
		VADDPD(m, m, m)
		VMULPD(top, m, m)
		l.compare(d, m, bits)
		if v > 0 {
			SHLL(operand.U8(v*l.width), bits)
		}
		ANDL(want, bits)
		ORL(bits, operand.Mem{Base: flags})
		ADDQ(operand.U32(row), rows)
		ADDQ(operand.Imm(16), lines)
		SUBQ(operand.Imm(4), flags) // the loop moves on by 8
	})
}

// marchStride advances by a number of samples at once. Weights lie in memory,
// each loaded once a step, and each input is broadcast once for all vectors.
func (l level) marchStride() {
	TEXT("marchStride"+l.name, NOSPLIT, "func(q, weights, from, to, inputs *float64, steps int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("marchStride%s is marchStrideGeneric for vectors of %d lanes.", l.name, l.width))
	q, weights := Load(Param("q"), GP64()), Load(Param("weights"), GP64())
	from, to := Load(Param("from"), GP64()), Load(Param("to"), GP64())
	inputs, n := Load(Param("inputs"), GP64()), Load(Param("steps"), GP64())
	mask := l.absolute()
	half := l
	half.vectors = 2 // sums take two more registers each
	half.passes(func(offset, pass int) {
		in, steps := GP64(), GP64()
		MOVQ(inputs, in)
		MOVQ(n, steps)
		u, v, peak := half.some(), half.some(), half.some()
		for i := range u {
			VMOVUPD(l.at(from, markX, offset, i), u[i])
			VMOVUPD(l.at(from, markY, offset, i), v[i])
			l.and(mask, u[i], peak[i])
		}
		input{}.loop(fmt.Sprintf("step%d", pass), in, steps, nil, func() {
			f, g := half.some(), half.some()
			x := l.vector()
			for k := range inputCount {
				VBROADCASTSD(operand.Mem{Base: in, Disp: k * 8}, x)
				for i := range f {
					if k == 0 {
						VMULPD(l.at(weights, 0, offset, i), x, f[i])
						VMULPD(l.at(weights, 1, offset, i), x, g[i])
					} else {
						VFMADD231PD(l.at(weights, 2*k, offset, i), x, f[i])
						VFMADD231PD(l.at(weights, 2*k+1, offset, i), x, g[i])
					}
				}
			}
			for i := range f {
				VFMADD231PD(l.at(q, 1, offset, i), v[i], f[i])
				VFMADD231PD(l.at(q, 0, offset, i), u[i], f[i])
				VFMADD231PD(l.at(q, 3, offset, i), v[i], g[i])
				VFMADD231PD(l.at(q, 2, offset, i), u[i], g[i])
				VADDPD(f[i], u[i], u[i])
				VADDPD(g[i], v[i], v[i])
				l.and(mask, u[i], f[i])
				VMAXPD(f[i], peak[i], peak[i])
			}
			ADDQ(operand.U32(inputRow-8), in) // the loop moves on by 8
		})
		half.leave(input{from: from, to: to}, offset, u, v, peak)
	})
	VZEROUPPER()
	RET()
}

// mix forms the inputs of strides from samples.
func (l level) mix() {
	TEXT("mix"+l.name, NOSPLIT, "func(inputs, shares, ground *float64, stride, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("mix%s is mixGeneric for vectors of %d lanes.", l.name, l.width))
	inputs, shares := Load(Param("inputs"), GP64()), Load(Param("shares"), GP64())
	ground, stride := Load(Param("ground"), GP64()), Load(Param("stride"), GP64())
	n := Load(Param("n"), GP64())
	sum := make([]reg.VecVirtual, inputRow/8/l.width)
	for v := range sum {
		sum[v] = l.vector()
	}
	x, c, left := l.vector(), GP64(), GP64()
	Label("interval")
	VBROADCASTSD(operand.Mem{Base: ground}, x)
	MOVQ(shares, c)
	for v := range sum {
		VMULPD(l.at(c, 0, 0, v), x, sum[v])
	}
	MOVQ(stride, left)
	Label("sample")
	ADDQ(operand.Imm(8), ground)
	ADDQ(operand.U32(inputRow), c)
	VBROADCASTSD(operand.Mem{Base: ground}, x)
	for v := range sum {
		VFMADD231PD(l.at(c, 0, 0, v), x, sum[v])
	}
	DECQ(left)
	JNZ(operand.LabelRef("sample"))
	for v := range sum {
		VMOVUPD(sum[v], l.at(inputs, 0, 0, v))
	}
	ADDQ(operand.U32(inputRow), inputs)
	DECQ(n)
	JNZ(operand.LabelRef("interval"))
	VZEROUPPER()
	RET()
}
