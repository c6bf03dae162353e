package ingest

import (
	"slices"
	"strings"
)

// nameColumn reads one name: a quantity or direction, with its unit in brackets,
// behind it or not at all.
func nameColumn(name string, line int) (plainColumn, error) {
	name = strings.Trim(name, " \t\"'")
	base, unit := splitUnit(name)
	c := plainColumn{name: name}
	word := strings.TrimRight(commentKey(base), ".")
	switch {
	case slices.Contains(timeNames, word):
		return c.asTime(word, unit, line)
	case slices.Contains(indexNames, word):
		c.kind = columnIgnored
		return c, nil
	case slices.Contains(spectralNames, firstWord(word)) || strings.EqualFold(unit, "hz"):
		c.kind = columnSpectral
		return c, nil
	case otherQuantity(word) != "":
		c.kind = columnIgnored
		return c, nil
	}
	if unit == "" {
		word, unit = cutUnitWord(word)
	}
	if slices.Contains(accelerationNames, word) {
		c.kind = columnValue
	} else if isCounter(word) {
		c.kind = columnValue // of unknown direction
	} else if c.channel = codeOf(base[:min(len(word), len(base))]); c.channel.code != "" {
		c.kind = columnValue
		c.orientation, _ = c.channel.direction()
		c.orientation.Label = c.channel.code
	} else if o, ok := columnDirection(base, word); ok {
		c.kind, c.orientation = columnValue, o
	}
	if unit != "" {
		c.unit = statement{unit, line}
	}
	return c, nil
}

// The words by which columns are named, as commentKey spells them.
var (
	timeNames         = []string{"t", "time", "sec", "seconds", "time_s", "time_sec", "time_seconds", "t_s", "time_ms", "t_ms"}
	indexNames        = []string{"index", "sample", "sample_number", "no", "n_sample"}
	accelerationNames = []string{"acceleration", "accel", "acc", "a", "ag", "ground_acceleration", "acceleration_x", "acceleration_y", "accel_x", "accel_y", "acc_x", "acc_y"}
	spectralNames     = []string{"period", "periods", "freq", "frequency", "frequencies"}
	ordinateNames     = []string{"sa", "psa", "sv", "psv", "sd", "psd", "fas", "rs", "spectral", "spectrum", "spectra", "fourier", "pseudo"}
)

// The words that names of other quantities are made of: those that say which, and
// those that may stand beside them.
var (
	seriesNames = []string{"velocity", "velocities", "displacement", "displacements", "spectrum", "spectra", "spectral"}
	otherWords  = slices.Concat(seriesNames, ordinateNames, spectralNames, indexNames, []string{"vel", "veloc", "disp", "displ"})
	besideWords = []string{"acceleration", "accel", "acc", "response", "amplitude", "amplitudes", "ground", "relative", "absolute", "total",
		"time", "history", "series", "component", "horizontal", "vertical", "ns", "ew", "ud", "n", "e", "z", "h1", "h2", "x", "y", "up", "s", "sec", "hz", "cm", "m", "g"}
)

// isOtherName reports whether a name is that of another quantity than acceleration,
// from its first word to its last.
func isOtherName(word string) bool {
	other := false
	for _, part := range strings.Split(strings.Trim(word, "_"), "_") {
		if slices.Contains(otherWords, part) {
			other = true
		} else if !slices.Contains(besideWords, part) {
			return false
		}
	}
	return other
}

// isSeriesName reports whether such a name says in whole words what the numbers are.
func isSeriesName(word string) bool {
	return isOtherName(word) && slices.ContainsFunc(strings.Split(word, "_"), func(part string) bool { return slices.Contains(seriesNames, part) })
}

// spectraReason is why a table of spectra is skipped.
const spectraReason = "spectra, not a time series"

// asTime makes a column of times, whose unit is in its name, in brackets or unknown.
func (c plainColumn) asTime(word, unit string, line int) (plainColumn, error) {
	c.kind = columnTime
	switch {
	case isSeconds(unit) || unit == "" && word != "t" && word != "time" && !strings.HasSuffix(word, "_ms"):
		c.scale = 1
	case strings.EqualFold(unit, "ms") || unit == "" && strings.HasSuffix(word, "_ms"):
		c.scale = 1e-3
	case unit != "" && word == "t" && isUnitWord(unit):
		c.unit = statement{unit, line} // of T beside L
		return c, nil
	case unit != "":
		return c, refuse(line, "time", "unknown unit %s of time; known are s and ms", found(unit))
	}
	return c, nil
}

// isCounter reports whether a name is one digit over zero, which counts channels and says
// nothing of their direction.
func isCounter(name string) bool { return len(name) == 1 && name[0] >= '1' && name[0] <= '9' }

// columnDirection reads the direction that a column is named by, perhaps after a
// word for acceleration.
func columnDirection(base, word string) (Orientation, bool) {
	for _, quantity := range []string{"acceleration", "accel", "acc", "a"} {
		if rest, ok := strings.CutPrefix(word, quantity+"_"); ok {
			word = rest
			break
		}
	}
	for _, label := range []string{base, word, strings.ReplaceAll(word, "_", "-")} {
		o, ok := direction(label)
		if deg, isBearing := bearing(label); isBearing {
			o, ok = azimuth(deg), true
		}
		if ok {
			o.Label = base
			return o, true
		}
	}
	return Orientation{}, false
}

// maxUnitWord is longer than any unit is written.
const maxUnitWord = 40

// cutUnitWord splits the unit off a word that ends in one: acc_gal, ns_cm_s2,
// acc_cms2. The unit is "" where it ends in none.
func cutUnitWord(word string) (rest, unit string) {
	for i := range word {
		if word[i] != '_' || i == 0 || len(word)-i > maxUnitWord {
			continue
		}
		text := strings.ReplaceAll(word[i+1:], "_", "")
		if length, ok := strings.CutSuffix(text, "s2"); ok && lengthWords[length] != "" {
			text = length + "/s2"
		}
		if u, err := ParseUnit(text); err == nil {
			return word[:i], u.Name
		}
	}
	return word, ""
}

func firstWord(word string) string {
	first, _, _ := strings.Cut(word, "_")
	return first
}

// otherQuantity returns why a column is passed over whose name begins with another
// quantity than acceleration, or has the words of spectra in it; "" for all else.
func otherQuantity(word string) string {
	switch {
	case strings.HasPrefix(word, "vel"):
		return "velocity series, not acceleration"
	case strings.HasPrefix(word, "disp"):
		return "displacement series, not acceleration"
	}
	for _, part := range strings.FieldsFunc(word, func(r rune) bool { return r == '_' || r == '(' || r == '[' }) {
		if slices.Contains(ordinateNames, part) {
			return spectraReason
		}
	}
	return ""
}

// areUnits reports whether a row holds units and nothing else, one at least that is
// none of time.
func areUnits(fields []string) bool {
	some := false
	for _, f := range fields {
		f = bare(f)
		if f != "" && !isUnitWord(f) {
			return false
		}
		some = some || f != "" && !isTimeUnit(f)
	}
	return some
}

// bare takes brackets, quotes and a dash for "none" off a unit.
func bare(unit string) string {
	return strings.Trim(strings.Trim(unit, " \t\"'"), " ()[]-")
}

// isUnitWord reports whether text is a unit of time, acceleration, velocity or
// length, or counts.
func isUnitWord(text string) bool {
	if _, err := ParseUnit(text); err == nil || IsCounts(text) || isTimeUnit(text) {
		return true
	}
	spelled := unitSpelling.Replace(strings.ToLower(text))
	_, isVelocity := cutUnit(spelled, perSecond)
	return isVelocity || lengthWords[spelled] != ""
}

func isTimeUnit(text string) bool { return isSeconds(text) || strings.EqualFold(text, "ms") }

// splitUnit splits "Acc (cm/s^2)", "acc [g]" or "Acceleration in g" into name
// and unit.
func splitUnit(name string) (base, unit string) {
	for _, brackets := range []string{"[]", "()"} {
		open, end := strings.IndexByte(name, brackets[0]), strings.LastIndexByte(name, brackets[1])
		if open >= 0 && end > open && strings.TrimSpace(name[end+1:]) == "" {
			return strings.TrimSpace(name[:open]), strings.TrimSpace(name[open+1 : end])
		}
	}
	if base, unit, ok := strings.Cut(name, " in "); ok {
		return strings.TrimSpace(base), strings.TrimSpace(unit)
	}
	return name, ""
}
