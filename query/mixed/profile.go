package mixed

import (
	"math"

	"swaybook/query/stats"
)

// profile is the likelihood as a function of the ratio λ = τ²/φ² alone.
type profile struct {
	groups     []group   // at least two
	weights    []float64 // room for as many
	within     float64   // sum of squares within groups
	members    float64   // number of values, less one where restricted
	restricted bool      // REML
}

// fit sets all but the counts of out; Mu is relative to the groups' centre.
func (p profile) fit(out *Result) {
	most := p.greatestRatio()
	if math.IsInf(most, 1) {
		p.fitWithout(out)
		return
	}
	ratio := p.bestRatio(most)
	at := p.at(ratio)
	variance := at.squares / p.members
	out.Mu, out.Phi = at.mu, math.Sqrt(variance)
	out.Tau = math.Sqrt(float64(variance * ratio))
	out.Sigma = math.Sqrt(variance + float64(variance*ratio))
	out.MuSE = math.Sqrt(variance / at.weight)
	out.LogLikelihood = -(p.deviance(ratio) + float64(p.members*(1+stats.Log(2*math.Pi)))) / 2
}

// fitWithout is the limit φ = 0, in which groups count alike.
func (p profile) fitWithout(out *Result) {
	count := float64(len(p.groups))
	mu, squares := p.spreadOfMeans()
	if p.restricted {
		out.Tau = math.Sqrt(squares / (count - 1))
	} else {
		out.Tau = math.Sqrt(squares / count)
	}
	out.Mu, out.Phi, out.Sigma, out.LogLikelihood = mu, 0, out.Tau, math.Inf(1)
	out.MuSE = out.Tau / math.Sqrt(count)
}

// spreadOfMeans returns the mean of the groups' means and the sum of squares
// about it.
func (p profile) spreadOfMeans() (mean, squares float64) {
	var sum float64
	for _, g := range p.groups {
		sum += g.mean
	}
	mean = sum / float64(len(p.groups))
	for _, g := range p.groups {
		d := g.mean - mean
		squares += float64(d * d)
	}
	return mean, squares
}

// greatestRatio returns a λ beyond which the likelihood falls. With w = n/(1+λ·n),
// 1/(1+λ) <= w < 1/λ, and B the spread of the means, from λ = 1 on
//
//	Σ w - Σ w²/Σ w >= Σ w - max w >= (G-1)/(2·λ),  Σ w²·(m-μ)² <= B/λ²,
//
// so that slope is positive for λ > 2·M·B/((G-1)·S). It is +Inf where nothing
// varies within groups.
func (p profile) greatestRatio() float64 {
	if p.within == 0 {
		return math.Inf(1)
	}
	_, between := p.spreadOfMeans()
	return max(1, 2*p.members*between/(float64(len(p.groups)-1)*p.within))
}

// bestRatio looks at slope over ratios twice as great from one to the next, from
// where no group notices to where the likelihood is known to fall, finds each
// minimum between by halving, and returns the ratio of the deepest.
func (p profile) bestRatio(most float64) float64 {
	var largest float64
	for _, g := range p.groups {
		largest = max(largest, g.size)
	}
	best, depth := 0.0, math.Inf(1)
	consider := func(ratio float64) {
		if deviance := p.deviance(ratio); deviance < depth {
			best, depth = ratio, deviance
		}
	}
	last, falling := 0.0, p.slope(0) < 0
	if !falling {
		consider(0)
	}
	for ratio := 0x1p-10 / largest; last < most; ratio *= 2 {
		rising := p.slope(ratio) >= 0
		if falling && rising {
			consider(p.minimum(last, ratio))
		}
		last, falling = ratio, !rising
	}
	return best
}

// minimum halves the interval between low, where the slope is negative, and high,
// where it is not, until nothing lies between.
func (p profile) minimum(low, high float64) float64 {
	const most = 200 // 52 but where the minimum is all but 0
	for range most {
		middle := low + float64((high-low)/2)
		if middle <= low || middle >= high {
			break
		}
		if p.slope(middle) < 0 {
			low = middle
		} else {
			high = middle
		}
	}
	return high
}

// point is what follows from a ratio: μ, Σ w, and the sum of squares M·φ². The
// weights w are left in p.weights.
type point struct{ mu, weight, squares float64 }

func (p profile) at(ratio float64) point {
	var weight, weighted float64
	for i, g := range p.groups {
		w := g.size / (1 + float64(ratio*g.size))
		p.weights[i] = w
		weight += w
		weighted += float64(w * g.mean)
	}
	mu, squares := weighted/weight, p.within
	for i, g := range p.groups {
		w, d := p.weights[i], g.mean-mu
		squares += float64(w * float64(d*d))
	}
	return point{mu, weight, squares}
}

// deviance is -2 times the logarithm of the likelihood without its constants,
//
//	M·ln φ² + Σ ln(1+λ·n) + [REML] ln Σ w.
func (p profile) deviance(ratio float64) float64 {
	at := p.at(ratio)
	sum := float64(p.members * stats.Log(at.squares/p.members))
	for _, g := range p.groups {
		sum += stats.Log(1 + float64(ratio*g.size))
	}
	if p.restricted {
		sum += stats.Log(at.weight)
	}
	return sum
}

// slope is the derivative of deviance by λ,
//
//	-Σ w²·(m-μ)²/φ² + Σ w - [REML] Σ w²/Σ w,
//
// since the derivative of w is -w² and μ is where the sum of squares is least.
func (p profile) slope(ratio float64) float64 {
	at := p.at(ratio)
	var fall, squares float64
	for i, g := range p.groups {
		w, d := p.weights[i], g.mean-at.mu
		squares += float64(w * w)
		fall += float64(float64(w*w) * float64(d*d))
	}
	slope := at.weight - float64(p.members*fall)/at.squares
	if p.restricted {
		slope -= squares / at.weight
	}
	return slope
}
