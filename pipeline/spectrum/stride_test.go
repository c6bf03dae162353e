package spectrum

import (
	"math"
	"testing"
)

// TestStrideBlocks marches the same oscillators step by step and in strides, and
// compares displacement and velocity at the starts of blocks, and every |u| of a
// block with the bound by which it would be left out.
func TestStrideBlocks(t *testing.T) {
	for seed := range uint64(3) {
		m := newMotion()
		m.load(seededMotion(seed, 9*blockSteps+21))
		m.loadStrides([...]bool{true, true})
		for level, over := range strides {
			for _, phase := range []float64{1e-6, 1e-3, 0.1, 0.3, maxStridePhase} {
				for _, damping := range []float64{0, 0.05, 0.2} {
					o, _ := newSlow(0, phase/float64(over), damping)
					if strideOf(o.phase, damping) < 0 {
						t.Fatalf("phase %g damping %g has no stride", phase, damping)
					}
					compareStrides(t, m, &o, level)
				}
			}
		}
	}
}

func compareStrides(t *testing.T, m *motion, o *slow, level int) {
	t.Helper()
	g := newStrideGroups([]slow{*o}, level)[0]
	g.march(m)
	exact := newMotion()
	exact.load(m.a)
	steps := newSlowGroups([]slow{*o})[0]
	steps.march(exact)
	rho := strideBound(o.phase*float64(strides[level]), o.damping)
	for b := range m.blocks() {
		from, to := m.block(b)
		u := exact.rows[:to-from+1]
		steps.trace(exact, b, u, 1)
		top := 0.0
		for k := range len(u) - 1 {
			x, end := o.eq.scale*u[k][0], o.eq.scale*u[k+1][0]
			peak, _, _ := o.series.peak(0, x, o.velocity(x, end-x, m.a[from+k], m.a[from+k+1]), m.a[from+k], m.a[from+k+1]-m.a[from+k])
			top = max(top, peak)
		}
		if bound := (m.marks[b].Peak[0] + m.strides[level].lines[b].First) / rho; top > bound*(1+1e-12) {
			t.Errorf("M %d phase %g damping %g block %d: |u| = %v beyond its bound %v", strides[level], o.phase, o.damping, b, top, bound)
		}
		if b == 0 {
			continue
		}
		want := o.eq.scale * u[0][0]
		v := o.velocity(want, o.eq.scale*(u[1][0]-u[0][0]), m.a[from], m.a[from+1])
		// Of the reach so far, and of the velocity that gives it in a block.
		if size := max(math.Abs(want), top); math.Abs(m.marks[b].X[0]-want) > 1e-12*size || math.Abs(m.marks[b].Y[0]-v) > 1e-12*max(math.Abs(v), size) {
			t.Errorf("M %d phase %g damping %g block %d: state %v %v, want %v %v", strides[level], o.phase, o.damping, b, m.marks[b].X[0], m.marks[b].Y[0], want, v)
		}
	}
}

// TestStridesAgree solves a motion with twice and eight times the samples on the
// same straight lines, by which oscillators come to stride that did not.
func TestStridesAgree(t *testing.T) {
	const seed = 51
	a := seededMotion(seed, 700)
	list := Grid{[]float64{100, 130, 160, 170, 200, 400, 660, 680, 1000, 4000}, []float64{0, 0.05, 0.2, 0.9}}.Oscillators()
	want := mustSolve(t, NigamJennings, 1, list, a)
	for _, factor := range []int{2, 8} {
		for i, d := range mustSolve(t, NigamJennings, 1/float64(factor), list, interpolate(a, factor)) {
			if !(off(d, want[i]) <= 2e-12) {
				t.Errorf("seed %d: %+v: %d times the samples change D by %.2g", seed, list[i], factor, off(d, want[i]))
			}
		}
	}
}

// TestStrideShares checks the inputs of powers of time, whose integrals with
// Chebyshev polynomials are known: ∫T₀ = 2, ∫T₁ = 0, ∫T₂ = −2/3, ∫x·T₁ = 2/3,
// ∫x·T₃ = −2/5 over −1 to 1.
func TestStrideShares(t *testing.T) {
	for i, m := range strides {
		h := float64(m) / 2
		var constant, linear [16]float64
		for j, share := range strideShares[i] {
			for k, s := range share {
				constant[k] += s / h
				linear[k] += s / h * (float64(j)/h - 1)
			}
		}
		for _, c := range []struct {
			name      string
			got, want float64
		}{
			{"∫T0", constant[0], 2}, {"∫T1", constant[1], 0}, {"∫T2", constant[2], -2. / 3}, {"∫T10", constant[10], -2. / 99},
			{"∫xT0", linear[0], 0}, {"∫xT1", linear[1], 2. / 3}, {"∫xT3", linear[3], -2. / 5}, {"∫xT2", linear[2], 0},
		} {
			if math.Abs(c.got-c.want) > 1e-14 {
				t.Errorf("M %d: %s = %v, want %v", m, c.name, c.got, c.want)
			}
		}
	}
}
