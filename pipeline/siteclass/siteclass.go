// Package siteclass names the kind of ground below a station by Vs30, the mean
// velocity of shear waves in the upper 30 m, in m/s: 30 m over the time that they
// take.
//
// Classes that need more than Vs30 are never given. After EN 1998-1 those are E, a
// thin soft layer on rock; S1, soft clay of high plasticity, some 10 m or more; and
// S2, ground that liquefies. After ASCE/SEI 7 it is F, ground that needs a study of
// its own, and of class E what has soft clay though its Vs30 is not below 180 m/s.
// So a class from here is what Vs30 alone says, not a verdict on a site.
//
// The limits are those of the standards named at each function, given from memory.
package siteclass

import (
	"fmt"
	"math"
)

// Class is the letter of a ground type or of a site class.
type Class string

// limit says that a class reaches down to a velocity, which belongs to it or not.
type limit struct {
	aboveMS  float64
	included bool
	class    Class
}

// EN1998 returns the ground type A, B, C or D of EN 1998-1:2004, table 3.1, by
// Vs30 in m/s:
//
//	A  above 800
//	B  360 – 800
//	C  180 – 360
//	D  below 180
//
// The table says "above" and "below" at its ends, so that 800 is B and 180 is C. It
// leaves open whose 360 is: here C's, the softer, as the NEHRP provisions have it of
// theirs. It is an error if Vs30 is not positive and finite.
func EN1998(vs30 float64) (Class, error) {
	return classify(vs30, []limit{{800, false, "A"}, {360, false, "B"}, {180, true, "C"}, {0, false, "D"}})
}

// NeedsMoreThanVs30 reports whether a class is a ground type E, S1 or S2 of EN
// 1998-1:2004, table 3.1: what it says of layers holds whatever Vs30 is.
func NeedsMoreThanVs30(ground Class) bool { return ground == "E" || ground == "S1" || ground == "S2" }

// NEHRP returns the site class A, B, C, D or E of ASCE/SEI 7-10, table 20.3-1, by
// Vs30 in m/s, with the metric limits of the NEHRP provisions:
//
//	A  above 1500
//	B  760 – 1500
//	C  360 – 760
//	D  180 – 360
//	E  below 180
//
// The limits between B and C and between C and D belong to the softer class, 180 to
// D, after the inequalities of the NEHRP provisions (2003 edition, section 3.5.1:
// 760 < B ≤ 1500, 360 < C ≤ 760, 180 ≤ D ≤ 360). It is an error if Vs30
// is not positive and finite.
//
// ASCE/SEI 7-22 has finer classes, with BC, CD and DE between those of old, and moves
// the limits of B, C, D and E. The older ones are given because networks' metadata,
// ground-motion models and codes in force up to then use these letters in this sense.
func NEHRP(vs30 float64) (Class, error) {
	return classify(vs30, []limit{{1500, false, "A"}, {760, false, "B"}, {360, false, "C"}, {180, true, "D"}, {0, false, "E"}})
}

// classify returns the first class whose limit is met; limits fall and end at 0.
func classify(vs30 float64, limits []limit) (Class, error) {
	if !(vs30 > 0) || math.IsInf(vs30, 1) {
		return "", fmt.Errorf("Vs30 %v m/s is not a positive velocity", vs30)
	}
	i := 0
	for vs30 < limits[i].aboveMS || vs30 == limits[i].aboveMS && !limits[i].included {
		i++
	}
	return limits[i].class, nil
}
