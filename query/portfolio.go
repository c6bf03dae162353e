package query

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
)

// PortfolioStructure is a structure of a portfolio. Nil fields are unknown.
type PortfolioStructure struct {
	ID, Name string
	Structure
	// Modes are more than one, or none: then the structure is a single mass. Of several,
	// Structure has the period and damping of the first, and the whole mass.
	Modes                     []Mode
	LatitudeDeg, LongitudeDeg *float64
	BandWidth                 float64 // how uncertain the period is, a ratio of it
	Limits                    Limits
}

// Mode is one mode of a structure.
type Mode struct {
	PeriodS   float64
	Damping   float64  // ratio
	MassRatio float64  // participating share of the structure's mass
	HeightM   *float64 // effective, over the base
}

// Limits are the user's capacities. Nil fields are not given.
type Limits struct {
	DisplacementM, BaseShearN *float64
	DriftRatio                *float64 // displacement over height
}

// maxModes bounds the modes of a structure.
const maxModes = 50

// entryKind is a name that structures or modes have entries of.
type entryKind struct {
	name  string
	units []unit // those which a column may name: weight_kn; nil for none
}

var (
	structureEntries = []entryKind{
		{"id", nil}, {"name", nil}, {"period", timeUnits}, {"stiffness", stiffnessUnits}, {"mass", massUnits}, {"weight", forceUnits},
		{"damping", nil}, {"height", lengthUnits}, {"latitude", nil}, {"longitude", nil}, {"period_uncertainty", nil},
		{"max_displacement", lengthUnits}, {"max_base_shear", forceUnits}, {"max_drift_ratio", nil},
	}
	modeEntries = []entryKind{{"period", timeUnits}, {"damping", nil}, {"mass_ratio", nil}, {"height", lengthUnits}}
)

// checkEntryName refuses what is no entry's name.
func checkEntryName(name string, known []entryKind) error {
	if _, _, ok := findEntry(name, known); ok {
		return nil
	}
	names := make([]string, len(known))
	for i, k := range known {
		names[i] = k.name
	}
	return fmt.Errorf("unknown name %q; known: %s, and with units as in height_m or weight_kn", name, strings.Join(names, ", "))
}

// findEntry returns the kind of an entry's name and the unit that stands in it, "" for none.
func findEntry(name string, known []entryKind) (kind, unit string, ok bool) {
	for _, k := range known {
		if name == k.name {
			return k.name, "", true
		}
		for _, u := range k.units {
			if name == k.name+"_"+strings.ToLower(strings.ReplaceAll(u.name, "/", "_")) {
				return k.name, u.name, true
			}
		}
	}
	return "", "", false
}

// ReadPortfolio reads structures from a CSV or TOML file. The error is a UsageError that
// names the file and the lines of what is wrong, up to 20 of them.
func ReadPortfolio(path string) ([]PortfolioStructure, error) {
	drafts, err := readDrafts(path)
	if err != nil {
		return nil, portfolioError(path, err)
	}
	if len(drafts) == 0 {
		return nil, portfolioError(path, errors.New("holds no structure"))
	}
	const most = 20
	var wrong []error
	out := make([]PortfolioStructure, 0, len(drafts))
	lines := map[string]int{}
	for _, d := range drafts {
		s, err := d.structure()
		if err == nil && lines[s.ID] > 0 {
			err = &fileError{d.line, "id", fmt.Errorf("%q stands in line %d too", s.ID, lines[s.ID])}
		}
		if err != nil {
			if wrong = append(wrong, err); len(wrong) == most {
				break
			}
			continue
		}
		lines[s.ID] = d.line
		out = append(out, s)
	}
	if len(wrong) > 0 {
		return nil, portfolioError(path, wrong...)
	}
	return out, nil
}

func portfolioError(path string, errs ...error) error {
	texts := make([]string, len(errs))
	for i, err := range errs {
		separator := ": "
		if at, ok := errors.AsType[*fileError](err); ok && at.line > 0 {
			separator = ":"
		}
		texts[i] = path + separator + strings.TrimPrefix(err.Error(), "open "+path+": ")
	}
	return &UsageError{What: "structures", Why: strings.Join(texts, "\n"), Err: errors.Join(errs...)}
}

// entriesByKind are the entries by kind, a unit of the name put behind the number.
func entriesByKind(entries []entry, known []entryKind) (map[string]entry, error) {
	out := map[string]entry{}
	for _, e := range entries {
		kind, unit, _ := findEntry(e.name, known)
		if _, isThere := out[kind]; isThere {
			return nil, &fileError{e.line, e.name, fmt.Errorf("%s is given twice", kind)}
		}
		if unit != "" {
			if numberLength(e.text) != len(e.text) {
				return nil, &fileError{e.line, e.name, fmt.Errorf("%q is not a plain number such as 1.35 (decimal point, no thousands separators)", e.text)}
			}
			e.text += unit
		}
		out[kind] = e
	}
	return out, nil
}

// structure reads the draft. Every error is a *fileError.
func (d *draft) structure() (s PortfolioStructure, err error) {
	found, err := entriesByKind(d.entries, structureEntries)
	if err != nil {
		return s, err
	}
	s.ID, s.Name = found["id"].text, found["name"].text
	if s.ID == "" {
		return s, &fileError{d.line, "id", errors.New("is missing")}
	}
	switch _, isDamped := found["damping"]; {
	case len(d.modes) > 0:
		err = d.readModes(&s, found)
	case !isDamped:
		err = &fileError{d.line, "damping", errors.New("is missing")}
	default:
		s.Structure, err = ParseStructure(StructureText{
			Period: found["period"].text, Stiffness: found["stiffness"].text, Mass: found["mass"].text, Weight: found["weight"].text,
			Damping: found["damping"].text, Height: found["height"].text,
		})
		err = in(found, d.line, err)
	}
	if err != nil {
		return s, err
	}
	return s, s.readRest(found)
}

// in makes a *fileError from a UsageError about one of the entries found, or else of a line.
func in(found map[string]entry, line int, err error) error {
	if wrong, ok := errors.AsType[*UsageError](err); ok {
		if e, isThere := found[wrong.What]; isThere {
			return e.wrong(err)
		}
		return &fileError{line, wrong.What, errors.New(wrong.Why)}
	}
	return err
}

// wrong makes a *fileError of the entry from a UsageError, and nil from nil.
func (e entry) wrong(err error) error {
	if wrong, ok := errors.AsType[*UsageError](err); ok {
		return &fileError{e.line, e.name, errors.New(wrong.Why)}
	}
	return err
}

// readRest reads what structures of one mass and of several modes have alike.
func (s *PortfolioStructure) readRest(found map[string]entry) error {
	read := func(kind string, into **float64, parse func(string) (float64, error)) error {
		e, ok := found[kind]
		if !ok {
			return nil
		}
		x, err := parse(e.text)
		*into = &x
		return e.wrong(err)
	}
	var width *float64
	err := errors.Join(
		read("latitude", &s.LatitudeDeg, parseAngle("latitude", 90)),
		read("longitude", &s.LongitudeDeg, parseAngle("longitude", 360)),
		read("period_uncertainty", &width, ParseBandWidth),
		read("max_displacement", &s.Limits.DisplacementM, ParseLength),
		read("max_base_shear", &s.Limits.BaseShearN, ParseWeight),
		read("max_drift_ratio", &s.Limits.DriftRatio, func(text string) (float64, error) { return parseRatio("max_drift_ratio", text) }))
	if err != nil {
		return err
	}
	if width != nil {
		s.BandWidth = *width
	}
	return s.check(found)
}

func parseAngle(what string, most float64) func(string) (float64, error) {
	return func(text string) (float64, error) {
		x, err := parsePlain(what)(text)
		if err == nil && !(math.Abs(x) <= most) {
			err = usage(what, "%v is not within ±%v degrees", x, most)
		}
		return x, err
	}
}

// check looks for what does not go together.
func (s *PortfolioStructure) check(found map[string]entry) error {
	entry, why := s.Limits.check(&s.Structure)
	switch {
	case (s.LatitudeDeg == nil) != (s.LongitudeDeg == nil):
		return &fileError{max(found["latitude"].line, found["longitude"].line), "latitude", errors.New("latitude and longitude belong together")}
	case entry != "":
		return &fileError{found[entry].line, entry, errors.New(why)}
	}
	return nil
}

// readModes reads the modes of a structure that has such.
func (d *draft) readModes(s *PortfolioStructure, found map[string]entry) error {
	for _, kind := range []string{"period", "stiffness", "damping", "period_uncertainty"} {
		if e, ok := found[kind]; ok {
			return &fileError{e.line, e.name, errors.New("is not taken where there are modes, which have periods and dampings of their own")}
		}
	}
	var err error
	if s.MassKG, err = parseMassOrWeight(found["mass"].text, found["weight"].text); err != nil {
		return in(found, d.line, err)
	}
	if e, ok := found["height"]; ok {
		h, err := ParseLength(e.text)
		if err != nil {
			return e.wrong(err)
		}
		s.HeightM = &h
	}
	slices.SortFunc(d.modes, func(a, b modeDraft) int { return a.number - b.number })
	var ratios float64
	for _, m := range d.modes {
		mode, err := m.mode(d.line)
		if err != nil {
			return err
		}
		s.Modes, ratios = append(s.Modes, mode), ratios+mode.MassRatio
	}
	if ratios > 1+1e-6 {
		return &fileError{d.line, "mass_ratio", fmt.Errorf("those of all modes are %v together, which is over 1", ratios)}
	}
	s.PeriodS, s.Damping = s.Modes[0].PeriodS, s.Modes[0].Damping
	return nil
}

func (m *modeDraft) mode(line int) (out Mode, err error) {
	found, err := entriesByKind(m.entries, modeEntries)
	if err != nil {
		return out, err
	}
	what := fmt.Sprintf("mode %d", m.number)
	for _, kind := range []string{"period", "damping", "mass_ratio"} {
		if _, ok := found[kind]; !ok {
			return out, &fileError{line, what, errors.New("has no " + kind)}
		}
	}
	if out.PeriodS, err = ParsePeriod(found["period"].text); err != nil {
		return out, found["period"].wrong(err)
	}
	if out.Damping, err = ParseDamping(found["damping"].text); err != nil {
		return out, found["damping"].wrong(err)
	}
	if out.MassRatio, err = parseRatio("mass_ratio", found["mass_ratio"].text); err != nil {
		return out, found["mass_ratio"].wrong(err)
	}
	if !(out.MassRatio > 0 && out.MassRatio <= 1) {
		return out, &fileError{found["mass_ratio"].line, what, fmt.Errorf("the mass ratio %v is not above 0 and at most 1", out.MassRatio)}
	}
	if e, ok := found["height"]; ok {
		h, err := ParseLength(e.text)
		if err != nil {
			return out, e.wrong(err)
		}
		out.HeightM = &h
	}
	return out, nil
}
