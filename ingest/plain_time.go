package ingest

import (
	"fmt"
	"math"
	"slices"
)

// timeStep returns the step of a column of times in the column's unit, or an
// error that names the first time out of step and what may be wrong with it.
// digit is the unit of the last digit printed and line the line of each time.
//
// Times are even where every step is the median step within 1e-3 of it, or
// where printed times, each rounded to digit, can be those of an even series:
// all steps take one of two neighbouring multiples of digit, and no time is
// further than digit from the line through the ends. Where the two are digit and
// twice digit, a missing sample fits as well as rounding does: there the rarer
// step must occur at least three times and once in fifty, at distances that
// differ by no more than two, as roundings of an even series do (by one, and by
// one more where halves are rounded now up, now down).
func timeStep(times []float64, digit float64, line []int) (float64, error) {
	if len(times) < 2 {
		return 0, refuse(line[0], "time", "one time is no series")
	}
	n := len(times) - 1
	even := (times[n] - times[0]) / float64(n)
	least, most := stepRange(times)
	if least > 0 && most-least <= 1e-3*least {
		return even, nil // the median is between them
	}
	steps := stepsOf(times)
	m := median(steps)
	slack := 1e-12 * max(math.Abs(times[0]), math.Abs(times[n]))
	tolerance := float64(1e-3*math.Abs(m)) + slack
	at := slices.IndexFunc(steps, func(s float64) bool { return math.Abs(s-m) > tolerance })
	if at < 0 && m > 0 {
		return even, nil
	}
	if m > 0 && isRounded(times, steps, even, digit, slack) {
		return even, nil
	}
	if digit > tolerance { // rounding alone explains a step to either side
		wide := func(s float64) bool { return math.Abs(s-m) > digit+slack || s <= slack }
		if i := slices.IndexFunc(steps, wide); i >= 0 {
			at = i
		}
	}
	at = max(at, 0)
	return 0, refuse(line[at+1], "time", "step %.6g where the median is %.6g (from %.6g to %.6g): %s",
		steps[at], m, least, most, unevenCause(steps, at, m))
}

// isRounded reports whether the times can be an even series that was rounded to
// digit.
func isRounded(times, steps []float64, even, digit, slack float64) bool {
	k := math.Floor(even/digit + 1e-9)
	if !(digit > 0) || k < 1 || math.IsInf(digit, 0) {
		return false
	}
	var lower, upper spacing
	for i, s := range steps {
		switch r := s / digit; {
		case math.Abs(r-k) < 1e-3+slack/digit:
			lower.add(i)
		case math.Abs(r-k-1) < 1e-3+slack/digit:
			upper.add(i)
		default:
			return false
		}
		off := times[i+1] - times[0] - float64(float64(i+1)*even)
		if math.Abs(off) > digit+slack {
			return false
		}
	}
	if upper.n < lower.n {
		lower = upper
	}
	return k > 1 || lower.n*50 >= len(steps) && lower.isRegular()
}

// spacing is what is kept of rising positions: how many there are, the last, and
// the least and the greatest distance between neighbours.
type spacing struct{ n, last, least, most int }

func (s *spacing) add(at int) {
	if d := at - s.last; s.n == 1 {
		s.least, s.most = d, d
	} else if s.n > 1 {
		s.least, s.most = min(s.least, d), max(s.most, d)
	}
	s.n, s.last = s.n+1, at
}

// isRegular reports whether there are at least three positions, at distances
// that differ by at most two.
func (s *spacing) isRegular() bool { return s.n >= 3 && s.most-s.least <= 2 }

// unevenCause names what makes step at differ from the median m.
func unevenCause(steps []float64, at int, m float64) string {
	s := steps[at]
	close := func(a, b float64) bool { return math.Abs(a-b) <= 0.05*math.Abs(m) }
	changed := at+3 <= len(steps)
	for i := at; i < min(at+10, len(steps)); i++ {
		changed = changed && math.Abs(steps[i]-s) <= 0.01*math.Abs(s)
	}
	switch {
	case s < 0:
		return "time goes back, two records in one file?"
	case s == 0:
		return "a duplicate time"
	case m > 0 && changed:
		return "the sampling rate changes"
	case m > 0 && close(s, 2*m):
		return "a missing sample"
	case m > 0 && s > 2*m && close(s, m*math.Round(s/m)):
		return fmt.Sprintf("%.0f missing samples", math.Round(s/m)-1)
	}
	return "uneven times"
}

// stepRange returns the least and the greatest step between times.
func stepRange(times []float64) (least, most float64) {
	least, most = math.Inf(1), math.Inf(-1)
	for i, at := range times[1:] {
		step := at - times[i]
		if step < least {
			least = step
		}
		if step > most {
			most = step
		}
	}
	return least, most
}

func stepsOf(times []float64) []float64 {
	if len(times) < 2 {
		return nil
	}
	steps := make([]float64, len(times)-1)
	for i := range steps {
		steps[i] = times[i+1] - times[i]
	}
	return steps
}

// median returns the middle of xs, the lower of two.
func median(xs []float64) float64 {
	sorted := slices.Clone(xs)
	slices.Sort(sorted)
	return sorted[(len(sorted)-1)/2]
}

const (
	// niceStep is how near a step must be to a round one, relative, to be taken
	// for it.
	niceStep = 1e-4
	// niceRate is the highest whole sampling rate in Hz that a step is taken for.
	niceRate = 2000
)

// nearlyNice returns the whole sampling rate's or whole millisecond's step that
// is nearest to step in s, where it is within niceStep of it, else step itself.
// High rates lie close together: there the window narrows to a fiftieth of the
// distance to the next, so that a step between two of them stays as it is.
func nearlyNice(step float64) float64 {
	if rate := math.Round(1 / step); rate >= 1 && rate <= niceRate {
		if nice := 1 / rate; math.Abs(step-nice) <= min(niceStep, 0.02/rate)*nice {
			return nice
		}
	}
	if ms := math.Round(step * 1000); ms >= 1 {
		if nice := ms / 1000; math.Abs(step-nice) <= niceStep*nice {
			return nice
		}
	}
	return step
}
