package condition

import (
	"fmt"
	"strings"
)

// Words says for people what the step does.
func (s Step) Words() string {
	switch s.Do {
	case KindMean:
		return "takes off the mean" + s.windowWords(" of ")
	case KindTrend:
		return "takes off the " + [...]string{"", "straight line", "parabola"}[s.Degree] + " that fits" + s.windowWords(" ") + " best"
	case KindOffset:
		return fmt.Sprintf("takes off a step of the baseline of %g %% of PGA or more", 100*s.Share)
	case KindTaper:
		return fmt.Sprintf("cosine bells over %g %% of the length at either end, at most 5 s, outside the motion", 100*s.Share)
	case KindTrim:
		if s.ToS == 0 {
			return fmt.Sprintf("keeps what follows %g s", s.FromS)
		}
		return fmt.Sprintf("keeps %g to %g s", s.FromS, s.ToS)
	case KindPad:
		return fmt.Sprintf("zeros for at least %g s before and %g s after, which stay", s.BeforeS, s.AfterS)
	case KindOversample:
		return fmt.Sprintf("band-limited samples at steps %d times finer", s.Factor)
	case KindBandPass:
		return fmt.Sprintf("Butterworth, order %d forward and again backward, corners %g and %g Hz", s.Order, s.LowHz, s.HighHz)
	case KindCheck:
		return s.checkWords()
	}
	return s.filterWords()
}

// windowWords name the window, behind a word, nothing for the whole.
func (s Step) windowWords(behind string) string {
	switch s.Window {
	case WindowPreEvent:
		return behind + "what precedes the motion (the whole where that is shorter than 2 s)"
	case WindowStated:
		return behind + fmt.Sprintf("%g to %g s", s.FromS, s.ToS)
	}
	return ""
}

func (s Step) checkWords() string {
	var limits []string
	if s.VelocityShare > 0 {
		limits = append(limits, fmt.Sprintf("velocity over %g of PGV", s.VelocityShare))
	}
	if s.DisplacementShare > 0 {
		limits = append(limits, fmt.Sprintf("displacement over %g of PGD", s.DisplacementShare))
	}
	return "notes motions that, integrated from rest, end with a " + strings.Join(limits, " or a ")
}

func (s Step) filterWords() string {
	const kind = "Butterworth, order %d forward and again backward, "
	if s.ByNoise == nil {
		return fmt.Sprintf(kind+"corner %g Hz", s.Order, s.CornerHz)
	}
	n := s.ByNoise
	otherwise := "none"
	if n.ElseHz > 0 {
		otherwise = fmt.Sprintf("%g Hz", n.ElseHz)
	}
	return fmt.Sprintf(kind+"corner where motion is %g times the noise, %g to %g Hz; %s where no noise was recorded", s.Order, n.Ratio, n.LeastHz, n.MostHz, otherwise)
}

// Applies says for people to which components the steps apply.
func (r Recipe) Applies() string {
	if len(r.States) == 0 {
		return "no component"
	}
	return strings.Join(r.States, ", ") + " components"
}
