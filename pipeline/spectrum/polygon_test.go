package spectrum

import (
	"math"
	"math/rand/v2"
	"testing"

	"swaybook/pipeline/internal/kernel"
)

// randomPolygon returns a polygon of a few points, long or round, with a ceiling
// somewhere about the median of its L, or none.
func randomPolygon(r *rand.Rand) *polygon {
	p := new(polygon)
	p.begin(1e-3, 1e-3)
	long := math.Exp(2 * r.NormFloat64())
	for range 1 + r.IntN(30) {
		p.widen([]kernel.Point{{X: long * r.NormFloat64(), Y: r.NormFloat64()}})
	}
	p.raise(20)
	p.ceiling = p.floor * (1 + 0.3*r.Float64())
	if r.IntN(4) == 0 {
		p.ceiling = math.Inf(1)
	}
	p.enclose()
	return p
}

// TestFenceKeepsWithinLimits looks at the corners of fences, beyond which none of
// their points are: none may be beyond a limit. Sides are within theirs by the slack.
func TestFenceKeepsWithinLimits(t *testing.T) {
	for seed := range uint64(500) {
		p := randomPolygon(rand.New(rand.NewPCG(seed, 3)))
		for i := range Directions {
			want := max(p.reach[i], p.floor)
			if p.reach[i] >= p.ceiling {
				want = 0
				for _, x := range p.reach {
					want = max(want, x)
				}
			}
			if p.limits[i] != want {
				t.Fatalf("seed %d: limit %v in direction %d, want %v", seed, p.limits[i], i, want)
			}
		}
		for k := range p.fence {
			a, b := p.fence[k], p.fence[(k+1)%len(p.fence)]
			turn := (b.direction - a.direction + Directions) % Directions
			if turn == 0 {
				continue // the last ones are the first again
			}
			if turn > widestSide {
				t.Fatalf("seed %d: sides %d° apart", seed, turn)
			}
			if share := a.distance / p.limits[a.direction]; math.Abs(share*(1+p.slack)-1) > 1e-12 {
				t.Errorf("seed %d: side at a share of %v of its limit, slack %v", seed, share, p.slack)
			}
			sin, cos := math.Sincos(float64(turn) * math.Pi / Directions)
			along := (b.distance - a.distance*cos) / sin // of the corner from the foot of a
			for i := range turn {
				s, c := math.Sincos(float64(i) * math.Pi / Directions)
				if x, limit := a.distance*c+along*s, p.limits[(a.direction+i)%Directions]; x > limit*(1+1e-12) {
					t.Errorf("seed %d: corner at %v in direction %d, the limit is %v", seed, x, (a.direction+i)%Directions, limit)
				}
			}
		}
	}
}

// TestIsBeyondIsItsDefinition compares with all sides.
func TestIsBeyondIsItsDefinition(t *testing.T) {
	beyond := 0
	for seed := range uint64(300) {
		r := rand.New(rand.NewPCG(seed, 4))
		p := randomPolygon(r)
		for range 20 {
			x, y, share := 0.7*p.least*r.NormFloat64(), 0.7*p.least*r.NormFloat64(), 0.3+0.7*r.Float64()
			want := false
			for k := range p.fence {
				nx, ny := p.fence[k].normal()
				want = want || math.Abs(x*nx+y*ny) > share
			}
			if got := p.isBeyond(x, y, share); got != want {
				t.Errorf("seed %d: (%v, %v) beyond %v of the fence: %v", seed, x, y, share, got)
			}
			if want {
				beyond++
			}
		}
		if !p.isBeyond(0, 0, -1) {
			t.Errorf("seed %d: the origin is within a share of -1", seed)
		}
	}
	if beyond < 600 || beyond > 5400 {
		t.Errorf("%d of 6000 points are beyond, so that the test shows little", beyond)
	}
}
