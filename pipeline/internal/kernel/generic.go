package kernel

import (
	"math"
	"math/bits"
	"unsafe"
)

// The portable kernel takes four lanes side by side, because a single
// recurrence waits for its own last result most of the time. Magnitudes are
// compared as integers, without the sign bit, which leaves the floating-point
// units to the recurrence.
const side = 4

func marchSlowGeneric(q *Slow, from, to *Mark, ground *float64, steps int) {
	a := unsafe.Slice(ground, steps+2)
	for l := 0; l < Lanes; l += side {
		slowFour(q, from, to, a, l)
	}
}

func slowFour(q *Slow, from, to *Mark, a []float64, l int) {
	d, s := (*[side]float64)(q.Decay[l:]), (*[side]float64)(q.Stiffness[l:])
	m, o := (*[side]float64)(q.Middle[l:]), (*[side]float64)(q.Oldest[l:])
	u0, u1, u2, u3 := from.X[l], from.X[l+1], from.X[l+2], from.X[l+3]
	w0, w1, w2, w3 := from.Y[l], from.Y[l+1], from.Y[l+2], from.Y[l+3]
	p0, p1, p2, p3 := magnitude(u0), magnitude(u1), magnitude(u2), magnitude(u3)
	x, y := a[0], a[1]
	for _, z := range a[2:] {
		w0 = math.FMA(-s[0], u0, math.FMA(w0, d[0], math.FMA(o[0], x, math.FMA(m[0], y, z))))
		w1 = math.FMA(-s[1], u1, math.FMA(w1, d[1], math.FMA(o[1], x, math.FMA(m[1], y, z))))
		w2 = math.FMA(-s[2], u2, math.FMA(w2, d[2], math.FMA(o[2], x, math.FMA(m[2], y, z))))
		w3 = math.FMA(-s[3], u3, math.FMA(w3, d[3], math.FMA(o[3], x, math.FMA(m[3], y, z))))
		x, y = y, z
		u0 += w0
		u1 += w1
		u2 += w2
		u3 += w3
		p0, p1 = max(p0, magnitude(u0)), max(p1, magnitude(u1))
		p2, p3 = max(p2, magnitude(u2)), max(p3, magnitude(u3))
	}
	to.X[l], to.X[l+1], to.X[l+2], to.X[l+3] = u0, u1, u2, u3
	to.Y[l], to.Y[l+1], to.Y[l+2], to.Y[l+3] = w0, w1, w2, w3
	from.Peak[l], from.Peak[l+1] = math.Float64frombits(p0>>1), math.Float64frombits(p1>>1)
	from.Peak[l+2], from.Peak[l+3] = math.Float64frombits(p2>>1), math.Float64frombits(p3>>1)
}

func marchTrainGeneric(q *Train, from, to *Mark, ground *float64, steps int) {
	a := unsafe.Slice(ground, steps+trainBeyond)
	for l := 0; l < Lanes; l += side {
		x, w := [side]float64(from.X[l:]), [side]float64(from.Y[l:])
		peak := [side]uint64{magnitude(x[0]), magnitude(x[1]), magnitude(x[2]), magnitude(x[3])}
		trainFour(q, &x, &w, &peak, a[:steps], l)
		copy(to.X[l:], x[:])
		copy(to.Y[l:], w[:])
		trainFour(q, &x, &w, &peak, a[steps:], l)
		for i, p := range peak {
			from.Peak[l+i] = math.Float64frombits(p >> 1)
		}
	}
}

func trainFour(q *Train, x, w *[side]float64, peak *[side]uint64, a []float64, l int) {
	d, s := (*[side]float64)(q.Decay[l:]), (*[side]float64)(q.Stiffness[l:])
	x0, x1, x2, x3 := x[0], x[1], x[2], x[3]
	w0, w1, w2, w3 := w[0], w[1], w[2], w[3]
	p0, p1, p2, p3 := peak[0], peak[1], peak[2], peak[3]
	for _, a := range a {
		x0, w0 = x0+w0, math.FMA(d[0], w0, math.FMA(-s[0], x0, a))
		x1, w1 = x1+w1, math.FMA(d[1], w1, math.FMA(-s[1], x1, a))
		x2, w2 = x2+w2, math.FMA(d[2], w2, math.FMA(-s[2], x2, a))
		x3, w3 = x3+w3, math.FMA(d[3], w3, math.FMA(-s[3], x3, a))
		p0, p1 = max(p0, magnitude(x0)), max(p1, magnitude(x1))
		p2, p3 = max(p2, magnitude(x2)), max(p3, magnitude(x3))
	}
	*x, *w = [side]float64{x0, x1, x2, x3}, [side]float64{w0, w1, w2, w3}
	*peak = [side]uint64{p0, p1, p2, p3}
}

// magnitude orders finite numbers by their absolute value.
func magnitude(x float64) uint64 { return math.Float64bits(x) << 1 }

func traceSlowGeneric(q *Slow, from *Mark, ground *float64, steps int, rows *Row, want uint32) {
	a, list := unsafe.Slice(ground, steps+2), unsafe.Slice(rows, steps)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		d, s, m, o := q.Decay[l], -q.Stiffness[l], q.Middle[l], q.Oldest[l]
		u, w := from.X[l], from.Y[l]
		for i := range list {
			w = math.FMA(s, u, math.FMA(w, d, math.FMA(o, a[i], math.FMA(m, a[i+1], a[i+2]))))
			u += w
			list[i][l] = u
		}
	}
}

func traceEachGeneric(q *Slow, from *Mark, ground *Row, steps int, rows *Row) {
	a, list := unsafe.Slice(ground, steps+2), unsafe.Slice(rows, steps)
	for l := range Lanes {
		d, s, m, o := q.Decay[l], -q.Stiffness[l], q.Middle[l], q.Oldest[l]
		u, w := from.X[l], from.Y[l]
		for i := range list {
			w = math.FMA(s, u, math.FMA(w, d, math.FMA(o, a[i][l], math.FMA(m, a[i+1][l], a[i+2][l]))))
			u += w
			list[i][l] = u
		}
	}
}

func traceFastEachGeneric(q *Fast, phase *Row, from *Mark, ground *Row, steps int, rows *Mark) {
	a, list := unsafe.Slice(ground, steps+2), unsafe.Slice(rows, steps)
	for l := range Lanes {
		yy, yz, zy, zz, jump := q.YY[l], q.YZ[l], q.ZY[l], q.ZZ[l], q.Jump[l]
		y, z, slope := from.X[l], from.Y[l], a[1][l]-a[0][l]
		for i := range list {
			list[i].X[l], list[i].Y[l] = y, z
			list[i].Peak[l] = math.FMA(-phase[l], a[i][l], math.FMA(jump, slope, y))
			next := a[i+2][l] - a[i+1][l]
			b := next - slope
			y, z = math.FMA(y, yy, math.FMA(yz, z, -float64(jump*b))), math.FMA(zy, y, math.FMA(zz, z, b))
			slope = next
		}
	}
}

func gatherGeneric(rows *Row, a *float64, from *[Lanes]int, n int) {
	list := unsafe.Slice(rows, n)
	for l, first := range from {
		column := unsafe.Slice((*float64)(unsafe.Add(unsafe.Pointer(a), first*8)), n)
		for i, x := range column {
			list[i][l] = x
		}
	}
}

func marchFastGeneric(q *Fast, from, to *Mark, bend *float64, steps int) {
	b := unsafe.Slice(bend, steps)
	for l := 0; l < Lanes; l += side {
		fastFour(q, from, to, b, l)
	}
}

func fastFour(q *Fast, from, to *Mark, bend []float64, l int) {
	yy, yz := (*[side]float64)(q.YY[l:]), (*[side]float64)(q.YZ[l:])
	zy, zz := (*[side]float64)(q.ZY[l:]), (*[side]float64)(q.ZZ[l:])
	jump := (*[side]float64)(q.Jump[l:])
	y0, y1, y2, y3 := from.X[l], from.X[l+1], from.X[l+2], from.X[l+3]
	z0, z1, z2, z3 := from.Y[l], from.Y[l+1], from.Y[l+2], from.Y[l+3]
	var p0, p1, p2, p3 uint64
	for _, b := range bend {
		p0 = max(p0, math.Float64bits(math.FMA(y0, y0, float64(z0*z0))))
		p1 = max(p1, math.Float64bits(math.FMA(y1, y1, float64(z1*z1))))
		p2 = max(p2, math.Float64bits(math.FMA(y2, y2, float64(z2*z2))))
		p3 = max(p3, math.Float64bits(math.FMA(y3, y3, float64(z3*z3))))
		y0, z0 = math.FMA(y0, yy[0], math.FMA(yz[0], z0, -float64(jump[0]*b))), math.FMA(zy[0], y0, math.FMA(zz[0], z0, b))
		y1, z1 = math.FMA(y1, yy[1], math.FMA(yz[1], z1, -float64(jump[1]*b))), math.FMA(zy[1], y1, math.FMA(zz[1], z1, b))
		y2, z2 = math.FMA(y2, yy[2], math.FMA(yz[2], z2, -float64(jump[2]*b))), math.FMA(zy[2], y2, math.FMA(zz[2], z2, b))
		y3, z3 = math.FMA(y3, yy[3], math.FMA(yz[3], z3, -float64(jump[3]*b))), math.FMA(zy[3], y3, math.FMA(zz[3], z3, b))
	}
	to.X[l], to.X[l+1], to.X[l+2], to.X[l+3] = y0, y1, y2, y3
	to.Y[l], to.Y[l+1], to.Y[l+2], to.Y[l+3] = z0, z1, z2, z3
	from.Peak[l], from.Peak[l+1] = math.Float64frombits(p0), math.Float64frombits(p1)
	from.Peak[l+2], from.Peak[l+3] = math.Float64frombits(p2), math.Float64frombits(p3)
}

func traceFastGeneric(q *Fast, from *Mark, bend *float64, steps int, rows *Mark, want uint32) {
	bends, list := unsafe.Slice(bend, steps), unsafe.Slice(rows, steps)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		yy, yz, zy, zz, jump := q.YY[l], q.YZ[l], q.ZY[l], q.ZZ[l], q.Jump[l]
		y, z := from.X[l], from.Y[l]
		for i, b := range bends {
			list[i].X[l], list[i].Y[l] = y, z
			list[i].Peak[l] = math.FMA(y, y, float64(z*z))
			y, z = math.FMA(y, yy, math.FMA(yz, z, -float64(jump*b))), math.FMA(zy, y, math.FMA(zz, z, b))
		}
	}
}

func screenGeneric(s *Screen, values *float64, stride int, lines *Line, flags *uint32, n int) {
	list, out := unsafe.Slice(lines, n), unsafe.Slice(flags, n)
	for i, line := range list {
		row := (*Row)(unsafe.Add(unsafe.Pointer(values), i*stride))
		sum := uint32(0)
		for l := range row {
			if math.Abs(row[l]) > s.at(line, l) {
				sum |= 1 << l
			}
		}
		out[i] = sum
	}
}

func screenSquaresGeneric(s *Screen, values *float64, stride int, lines *Line, flags *uint32, n int) {
	list, out := unsafe.Slice(lines, n), unsafe.Slice(flags, n)
	for i, line := range list {
		row := (*Row)(unsafe.Add(unsafe.Pointer(values), i*stride))
		sum := uint32(0)
		for l := range row {
			r := s.at(line, l)
			if !(r > 0) {
				r = 0
			}
			if math.Abs(row[l]) > float64(r*r) {
				sum |= 1 << l
			}
		}
		out[i] = sum
	}
}

// at returns the limit of lane l at a line.
func (s *Screen) at(line Line, l int) float64 {
	return math.FMA(-s.Second[l], line.Second, math.FMA(-s.First[l], line.First, s.Limit[l]))
}

func screenStepsGeneric(s *StepScreen, rows *Row, lines *Line, flags *uint32, n int, want uint32) {
	list, forces, out := unsafe.Slice(rows, n+1), unsafe.Slice(lines, n), unsafe.Slice(flags, n)
	for left := want; left != 0; left &= left - 1 {
		l := bits.TrailingZeros32(left)
		best, force, curve, slope := s.Best[l], s.Force[l], s.Curve[l], s.Slope[l]
		x := list[0][l]
		for i, line := range forces {
			end := list[i+1][l]
			d, top := math.Abs(end-x), math.Abs(x)
			if y := math.Abs(end); !(top > y) {
				top = y
			}
			x = end
			m := math.FMA(slope, d, math.FMA(curve, top, float64(force*line.First)))
			spare := math.FMA(0.5, m, -d)
			if !(spare > 0) {
				spare = 0
			}
			if float64(spare*spare) > float64((m+m)*(best-top)) {
				out[i] |= 1 << l
			}
		}
	}
}

// diagonal is √2 − 1, rounded up.
const diagonal = 0.4142135623730951

func screenFastGeneric(s *FastScreen, rows *Mark, ground *Row, flags *uint32, n int) {
	list, a, out := unsafe.Slice(rows, n+1), unsafe.Slice(ground, n+1), unsafe.Slice(flags, n)
	for i := range out {
		sum := uint32(0)
		for l := range Lanes {
			x, end, limit := list[i].Peak[l], list[i+1].Peak[l], s.Limit[l]
			y, z := math.Abs(list[i].X[l]), math.Abs(list[i].Y[l])
			size := math.FMA(diagonal, lesser(y, z), greater(y, z))
			line := x - list[i].X[l]
			last := math.FMA(-s.Phase[l], a[i+1][l]-a[i][l], line)
			if !(greater(math.Abs(line), math.Abs(last))+size > limit) {
				continue
			}
			m := float64(s.Curve[l] * size)
			spare := math.FMA(0.5, m, -math.Abs(end-x))
			if !(spare > 0) {
				spare = 0
			}
			if float64(spare*spare) > float64((m+m)*(limit-greater(math.Abs(x), math.Abs(end)))) {
				sum |= 1 << l
			}
		}
		out[i] = sum
	}
}

// greater and lesser return y unless x is the one.
func greater(x, y float64) float64 {
	if x > y {
		return x
	}
	return y
}

func lesser(x, y float64) float64 {
	if x < y {
		return x
	}
	return y
}

func greatestGeneric(top, at *Row, values *float64, stride, n int) {
	var sum, first Row
	for i := range n {
		row := (*Row)(unsafe.Add(unsafe.Pointer(values), i*stride))
		for l := range row {
			if x := math.Abs(row[l]); x > sum[l] {
				sum[l], first[l] = x, float64(i)
			}
		}
	}
	*top, *at = sum, first
}

func marchStrideGeneric(q *Stride, from, to *Mark, inputs *Input, steps int) {
	list := unsafe.Slice(inputs, steps)
	for l := 0; l < Lanes; l += 2 {
		u0, u1, v0, v1 := from.X[l], from.X[l+1], from.Y[l], from.Y[l+1]
		p0, p1 := magnitude(u0), magnitude(u1)
		for i := range list {
			x := list[i][0]
			f0, f1 := float64(q.Weights[0].U[l]*x), float64(q.Weights[0].U[l+1]*x)
			g0, g1 := float64(q.Weights[0].V[l]*x), float64(q.Weights[0].V[l+1]*x)
			for k := 1; k < Inputs; k++ {
				x, w := list[i][k], &q.Weights[k]
				f0, f1 = math.FMA(w.U[l], x, f0), math.FMA(w.U[l+1], x, f1)
				g0, g1 = math.FMA(w.V[l], x, g0), math.FMA(w.V[l+1], x, g1)
			}
			f0, f1 = math.FMA(q.UU[l], u0, math.FMA(q.UV[l], v0, f0)), math.FMA(q.UU[l+1], u1, math.FMA(q.UV[l+1], v1, f1))
			g0, g1 = math.FMA(q.VU[l], u0, math.FMA(q.VV[l], v0, g0)), math.FMA(q.VU[l+1], u1, math.FMA(q.VV[l+1], v1, g1))
			u0, u1, v0, v1 = u0+f0, u1+f1, v0+g0, v1+g1
			p0, p1 = max(p0, magnitude(u0)), max(p1, magnitude(u1))
		}
		to.X[l], to.X[l+1], to.Y[l], to.Y[l+1] = u0, u1, v0, v1
		from.Peak[l], from.Peak[l+1] = math.Float64frombits(p0>>1), math.Float64frombits(p1>>1)
	}
}

func mixGeneric(inputs, shares *Input, ground *float64, stride, n int) {
	out, c := unsafe.Slice(inputs, n), unsafe.Slice(shares, stride+1)
	a := unsafe.Slice(ground, n*stride+1)
	for i := range out {
		sum := &out[i]
		for k := range sum {
			sum[k] = float64(c[0][k] * a[i*stride])
		}
		for j := 1; j <= stride; j++ {
			x, share := a[i*stride+j], &c[j]
			for k := range sum {
				sum[k] = math.FMA(share[k], x, sum[k])
			}
		}
	}
}
