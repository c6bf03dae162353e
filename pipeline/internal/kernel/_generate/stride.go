package main

import (
	"fmt"

	. "github.com/mmcloughlin/avo/build"
	"github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

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
