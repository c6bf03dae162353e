package query

import (
	"math"
	"strings"
)

// Structure is a single-degree-of-freedom model. Nil fields are unknown.
type Structure struct {
	PeriodS float64  // undamped natural period
	Damping float64  // ratio
	MassKG  *float64 // the mass that moves
	HeightM *float64 // of the mass over the base
}

// StructureText is a structure as people write it, every quantity with its
// unit. Empty fields are not given.
type StructureText struct {
	Period, Stiffness string // one of both
	Mass, Weight      string // at most one; one where Stiffness is given
	Damping           string
	Height            string
}

// ParseStructure reads the quantities. From a stiffness k and the mass m, or the
// weight W = m·g, the period is 2π·√(m/k). Every error is a UsageError.
func ParseStructure(text StructureText) (Structure, error) {
	var s Structure
	var err error
	if s.MassKG, err = parseMassOrWeight(text.Mass, text.Weight); err != nil {
		return s, err
	}
	if s.PeriodS, err = periodOf(text.Period, text.Stiffness, s.MassKG); err != nil {
		return s, err
	}
	if s.Damping, err = ParseDamping(text.Damping); err != nil {
		return s, err
	}
	if isGiven(text.Height) {
		h, err := ParseLength(text.Height)
		if err != nil {
			return s, err
		}
		s.HeightM = &h
	}
	return s, s.validate()
}

func parseMassOrWeight(mass, weight string) (*float64, error) {
	switch {
	case isGiven(mass) && isGiven(weight):
		return nil, usage("weight", "a mass and a weight are given; give one")
	case isGiven(mass):
		m, err := ParseMass(mass)
		return &m, err
	case isGiven(weight):
		w, err := ParseWeight(weight)
		m := w / StandardGravity
		return &m, err
	}
	return nil, nil
}

func periodOf(period, stiffness string, massKG *float64) (float64, error) {
	switch {
	case isGiven(period) && isGiven(stiffness):
		return 0, usage("period", "a period and a stiffness are given; give one")
	case isGiven(period):
		return ParsePeriod(period)
	case !isGiven(stiffness):
		return 0, usage("period", "neither a period nor a stiffness is given")
	case massKG == nil:
		return 0, usage("stiffness", "the period follows from a stiffness only with a mass or a weight")
	}
	k, err := ParseStiffness(stiffness)
	if err != nil {
		return 0, err
	}
	return 2 * math.Pi * math.Sqrt(*massKG/k), nil
}

func isGiven(text string) bool { return strings.TrimSpace(text) != "" }

func (s *Structure) validate() error {
	if err := checkOscillators([]float64{s.PeriodS}, []float64{s.Damping}); err != nil {
		return err
	}
	if s.MassKG != nil && (!(*s.MassKG > 0) || math.IsInf(*s.MassKG, 1)) {
		return usage("mass", "%v kg is not positive and finite", *s.MassKG)
	}
	if s.HeightM != nil && (!(*s.HeightM > 0) || math.IsInf(*s.HeightM, 1)) {
		return usage("height", "%v m is not positive and finite", *s.HeightM)
	}
	return nil
}
