package main

import (
	"fmt"

	. "github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

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

// greatest takes the maximum of the magnitudes of rows that are stride bytes
// apart, and the number of the first row that has it.
func (l level) greatest() {
	TEXT("greatest"+l.name, NOSPLIT, "func(top, at, values *float64, stride, n int)")
	Pragma("noescape")
	Doc(fmt.Sprintf("greatest%s is greatestGeneric for vectors of %d lanes.", l.name, l.width))
	top, at, values := Load(Param("top"), GP64()), Load(Param("at"), GP64()), Load(Param("values"), GP64())
	stride, n := Load(Param("stride"), GP64()), Load(Param("n"), GP64())
	mask, one := l.absolute(), l.constant(1)
	l.passes(func(offset, pass int) {
		from, left := GP64(), GP64()
		MOVQ(values, from)
		MOVQ(n, left)
		sum, first, number := l.some(), l.some(), l.vector()
		l.zero(number)
		for v := range sum {
			l.zero(sum[v])
			l.zero(first[v])
		}
		line := fmt.Sprintf("line%d", pass)
		Label(line)
		for v := range sum {
			x := l.vector()
			l.and(l.at(from, 0, offset, v), mask, x)
			l.replace(x, sum[v], number, first[v])
		}
		VADDPD(one, number, number)
		ADDQ(stride, from)
		DECQ(left)
		JNZ(operand.LabelRef(line))
		for v := range sum {
			VMOVUPD(sum[v], l.at(top, 0, offset, v))
			VMOVUPD(first[v], l.at(at, 0, offset, v))
		}
	})
	VZEROUPPER()
	RET()
}

// replace sets sum to x and first to number where x > sum.
func (l level) replace(x, sum, number, first reg.VecVirtual) {
	if l.width == 8 {
		k := K()
		VCMPPD(operand.U8(greater), sum, x, k)
		VMOVAPD(x, k, sum)
		VMOVAPD(number, k, first)
		return
	}
	above := l.vector()
	VCMPPD(operand.U8(greater), sum, x, above)
	VBLENDVPD(above, x, sum, sum)
	VBLENDVPD(above, number, first, first)
}

// greater compares ordered, signalling.
const greater = 14

// compare sets bits to one bit for each lane, whether x > r.
func (l level) compare(x, r reg.VecVirtual, bits reg.Register) {
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
	mask, zero, half := l.absolute(), l.vector(), l.constant(0.5)
	l.zero(zero)
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
