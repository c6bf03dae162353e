package kernel

import (
	"math"
	"unsafe"
)

// MaxTerms is the greatest number of terms of a Turning.
const MaxTerms = 24

// Turning is for each lane a motion u(t) from displacement U and velocity V at t
// = 0, with
//
//	ü = Force + Rise·t − Linear·u̇ − Square·u,
//
// as a power series with the coefficients C, and what is found of the point near
// t = 0 where its velocity is zero.
type Turning struct {
	U, V, Force, Rise, Linear, Square Row
	// Top is u where the last correction, Move, leads to: to the time Time.
	Top, Time, Move Row
	// Velocity is that at t = 1, Bend half of ü there.
	Velocity, Bend Row
	C              [MaxTerms]Row
}

// turnPasses is the number of Newton's corrections that Turn makes.
const turnPasses = 3

// Turn expands motions and follows Newton's method to where their velocities are
// zero, from the zero of the parabola of velocity at t = 0, kept between 0 and 1
// until the last correction. The series end with the length of factors: factors[k]
// is 1/k! where a lane's own goes so far, 0 where it does not. Turn panics unless
// there are 5 to MaxTerms.
//
// Whether and where a lane has come to is for the caller to judge: nothing says
// that the velocity has a zero at all.
func Turn(t *Turning, factors []Row) {
	if len(factors) < 5 || len(factors) > MaxTerms {
		panic("kernel: number of terms is not from 5 to 24")
	}
	current.turn(t, &factors[0], len(factors))
}

func turnGeneric(t *Turning, factors *Row, terms int) {
	factor := unsafe.Slice(factors, terms)
	for l := range Lanes {
		d, j := t.expand(factor, l)
		velocity, bend := 0.0, 0.0
		sum := 0.0
		for k := terms - 1; k >= 0; k-- {
			bend, velocity, sum = bend+velocity, velocity+sum, sum+t.C[k][l]
		}
		t.Velocity[l], t.Bend[l] = velocity, bend
		at := clamp(parabola(t.V[l], d, j))
		for range turnPasses {
			u, v, w := t.at(terms, l, at)
			move := v / (w + w)
			t.Move[l], t.Time[l] = move, at-move
			t.Top[l] = math.FMA(-move, math.FMA(-w, move, v), u)
			at = clamp(t.Time[l])
		}
	}
}

// expand sets the coefficients of lane l and returns ü and its derivative at t =
// 0.
func (t *Turning) expand(factor []Row, l int) (second, third float64) {
	u, v, linear, square := t.U[l], t.V[l], t.Linear[l], t.Square[l]
	second = math.FMA(-linear, v, math.FMA(-square, u, t.Force[l]))
	third = math.FMA(-linear, second, math.FMA(-square, v, t.Rise[l]))
	t.C[0][l], t.C[1][l], t.C[2][l], t.C[3][l] = u, v, float64(second*factor[2][l]), float64(third*factor[3][l])
	d, j := second, third
	for k := 4; k < len(factor); k++ {
		d, j = j, math.FMA(-linear, j, -float64(square*d))
		t.C[k][l] = float64(j * factor[k][l])
	}
	return second, third
}

// at returns displacement, velocity and half of ü.
func (t *Turning) at(terms, l int, at float64) (u, v, w float64) {
	for k := terms - 1; k >= 0; k-- {
		w = math.FMA(w, at, v)
		v = math.FMA(v, at, u)
		u = math.FMA(u, at, t.C[k][l])
	}
	return u, v, w
}

// parabola returns the zero of v + second·t + third/2·t² nearer to 0, or if it
// has none the time at which it is least.
func parabola(v, second, third float64) float64 {
	twice := third + third
	square := math.FMA(second, second, -float64(twice*v))
	if !(square > 0) {
		square = 0
	}
	return 0 - (v+v)/(second+math.Copysign(math.Sqrt(square), second))
}

func clamp(t float64) float64 {
	if !(t > 0) {
		t = 0
	}
	if !(t < 1) {
		t = 1
	}
	return t
}
