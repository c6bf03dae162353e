// Command generate writes the assembly of package kernel and its Go stubs:
//
//	go run . -out ../kernel_amd64.s -stubs ../kernel_amd64.go -pkg kernel
//
// Blocks are pointed to by their first number, because this module does not see
// their types. Every kernel is written once for both widths of vector. What
// differs is the number of lanes a vector holds, the number of registers there
// are, and how lanes are compared.
package main

import (
	"fmt"
	"math"

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
		l.marchTrain()
		l.marchFast(false)
		l.marchFast(true)
		l.screen(false)
		l.screen(true)
		l.screenSteps()
		l.marchStride()
		l.mix()
		l.greatest()
		l.traceEach()
		l.traceFastEach()
		l.screenFast()
		l.gather()
		l.turn()
		l.widen()
		l.above()
		l.exceeds()
		l.sweep()
		l.displace()
		l.vibrate()
		l.screenOrbits()
		l.screenFence()
		l.greatestOf()
		l.project()
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

// constant returns a register that holds x in every lane.
func (l level) constant(x float64) reg.VecVirtual {
	word, low, wide := GP64(), XMM(), l.vector()
	MOVQ(operand.U64(math.Float64bits(x)), word)
	VMOVQ(word, low)
	VBROADCASTSD(low, wide)
	return wide
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
	trainDecay, trainStiffness                       = 0, 1
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

// marchTrain goes on for two steps when the state at the end is stored.
func (l level) marchTrain() {
	in := l.open("Train", false)
	mask := l.absolute()
	l.passes(func(offset, pass int) {
		ground, steps, _ := in.cursors()
		x, w, peak := l.some(), l.some(), l.some()
		for v := range x {
			VMOVUPD(l.at(in.from, markX, offset, v), x[v])
			VMOVUPD(l.at(in.from, markY, offset, v), w[v])
			l.and(mask, x[v], peak[v])
		}
		decay := l.coefficient(in.q, trainDecay, offset, l.keep)
		stiffness := l.coefficient(in.q, trainStiffness, offset, l.keep)
		a := l.vector()
		step := func() {
			VBROADCASTSD(operand.Mem{Base: ground}, a)
			for v := range x {
				t := l.vector()
				VMOVAPD(a, t)
				VFNMADD231PD(stiffness[v], x[v], t)
				VADDPD(w[v], x[v], x[v])
				VFMADD132PD(decay[v], t, w[v])
				l.and(mask, x[v], t)
				VMAXPD(t, peak[v], peak[v])
			}
		}
		in.loop(fmt.Sprintf("step%d", pass), ground, steps, nil, step)
		for v := range x {
			VMOVUPD(x[v], l.at(in.to, markX, offset, v))
			VMOVUPD(w[v], l.at(in.to, markY, offset, v))
		}
		step()
		ADDQ(operand.Imm(8), ground)
		step()
		for v := range x {
			VMOVUPD(peak[v], l.at(in.from, markPeak, offset, v))
		}
	})
	VZEROUPPER()
	RET()
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
