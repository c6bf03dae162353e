package query

import (
	"fmt"
	"slices"
	"strings"
)

// ParseCapacities reads capacities with commas between them, each by its unit: a length is a
// displacement, a force a base shear, a percentage a drift ratio: "0.05m,800kN,1%". The empty
// text gives none.
func ParseCapacities(text string) (l Limits, err error) {
	if !isGiven(text) {
		return l, nil
	}
	for word := range strings.SplitSeq(text, ",") {
		into, x, err := l.parse(word)
		if err != nil {
			return l, err
		}
		if *into != nil {
			return l, usage("capacity", "%q: a capacity of that kind is given already", strings.TrimSpace(word))
		}
		*into = &x
	}
	return l, nil
}

// parse reads one capacity and says where it goes.
func (l *Limits) parse(text string) (into **float64, x float64, err error) {
	const what = "capacity"
	_, rest, err := splitNumber(what, text)
	if err != nil {
		return nil, 0, err
	}
	name := strings.Join(strings.Fields(rest), "")
	isOf := func(units []unit) bool {
		return slices.ContainsFunc(units, func(u unit) bool { return u.name == name })
	}
	switch {
	case name == "%":
		x, err = parseRatio(what, text)
		into = &l.DriftRatio
	case isOf(lengthUnits):
		x, err = parsePositive(what, text, lengthUnits)
		into = &l.DisplacementM
	case isOf(forceUnits):
		x, err = parsePositive(what, text, forceUnits)
		into = &l.BaseShearN
	default:
		err = unknownUnit(what, text, name, slices.Concat(lengthUnits, forceUnits, []unit{{"% (drift)", "0.01"}}))
	}
	return into, x, err
}

// isNone reports whether no capacity is given.
func (l *Limits) isNone() bool { return *l == Limits{} }

// check looks for capacities that mean nothing, or for which the structure does not tell
// enough: entry is that of a portfolio, "" where all are right.
func (l *Limits) check(s *Structure) (entry, why string) {
	switch {
	case l.DriftRatio != nil && !(*l.DriftRatio > 0 && *l.DriftRatio < 1):
		return "max_drift_ratio", fmt.Sprintf("%v is not between 0 and 1", *l.DriftRatio)
	case l.DriftRatio != nil && s.HeightM == nil:
		return "max_drift_ratio", "needs the height"
	case l.BaseShearN != nil && s.MassKG == nil:
		return "max_base_shear", "needs a mass or a weight"
	}
	return "", ""
}

// capacityWords name the entries of capacities for people.
var capacityWords = map[string]string{"max_drift_ratio": "a drift ratio", "max_base_shear": "a base shear"}

func (l *Limits) validate(s *Structure) error {
	if entry, why := l.check(s); entry != "" {
		return usage("capacity", "%s %s", capacityWords[entry], why)
	}
	return nil
}

// of are the capacities that limit a quantity of a structure of this height.
func (l *Limits) of(quantity string, heightM *float64) (out []limit) {
	add := func(name string, given *float64, per float64) {
		if given != nil {
			out = append(out, limit{name, *given, *given * per})
		}
	}
	switch quantity {
	case "sd_m":
		add("displacement", l.DisplacementM, 1)
		add("drift", l.DriftRatio, orNaN(heightM))
	case "base_shear_n":
		add("base_shear", l.BaseShearN, 1)
	}
	return out
}

// limited are the quantities that capacities limit, but for a drift ratio, which has no unit.
var limited = map[string]quantityUnit{"displacement": quantityUnits["sd_m"], "base_shear": quantityUnits["base_shear_n"]}

// text writes a capacity in units for people.
func (l *LimitRatio) text(units Units) string {
	of, ok := limited[l.Name]
	if !ok {
		return percentText(l.Limit)
	}
	name, per := of.in(units)
	return figure(l.Limit/per) + " " + name
}

// capacityTable says how the motions compare with capacities, a row each.
func capacityTable(limits []LimitRatio, percents []float64, units Units) table {
	t := table{columns: []column{{name: "capacity", isWord: true}, {name: "limit"}, {name: "above"}, {name: "of"}, {name: "share"}}}
	for _, p := range percents {
		t.columns = append(t.columns, column{name: "p" + percentKey(p) + "/limit"})
	}
	t.columns = append(t.columns, column{name: "max/limit"}, column{name: "governing", isWord: true})
	for i := range limits {
		l := &limits[i]
		row := []string{strings.ReplaceAll(l.Name, "_", " "), l.text(units), fmt.Sprint(l.CountAbove), fmt.Sprint(l.Count), percentTitle(l.Above)}
		for _, x := range l.Percentiles {
			row = append(row, figure(x))
		}
		t.add(append(row, figure(l.Max), l.Governing)...)
	}
	return t
}

// capacityTitle stands over the table.
func capacityTitle(band *DemandBand) string {
	if band != nil {
		return "Beside the capacities, over the band"
	}
	return "Beside the capacities"
}
