package query

import (
	"fmt"
	"strings"
)

// Sentences about a record, for tables and figures; what is unknown is left out.

// phrase joins what is known.
func phrase(parts ...string) string {
	known := make([]string, 0, len(parts))
	for _, p := range parts {
		if p != "" {
			known = append(known, p)
		}
	}
	return printable(strings.Join(known, ", "))
}

// spaced joins words that are known.
func spaced(words ...string) string {
	return strings.Join(strings.Fields(strings.Join(words, " ")), " ")
}

// withNumber writes a number between words, "" where it is unknown.
func withNumber(before string, x *float64, behind string) string {
	if x == nil {
		return ""
	}
	return before + shortest(*x) + behind
}

func place(latitude, longitude *float64) string {
	if latitude == nil || longitude == nil {
		return ""
	}
	return fmt.Sprintf("at %s, %s", shortest(*latitude), shortest(*longitude))
}

// eventWords describe the earthquake, "" where nothing is known of it.
func (r *RecordRow) eventWords() string {
	magnitude := ""
	if r.Magnitude != nil {
		magnitude = spaced(orEmpty(r.MagnitudeType), shortest(*r.Magnitude))
		if r.MagnitudeType == nil {
			magnitude = "magnitude " + magnitude
		}
	}
	return phrase(spaced(orEmpty(r.Event), orEmpty(r.EventName)), timeText(r.Origin), magnitude,
		withNumber("depth ", r.DepthKM, " km"), place(r.EventLatitude, r.EventLongitude))
}

// stationWords describe the site.
func (r *RecordRow) stationWords() string {
	code := orEmpty(r.Station)
	if r.Network != nil && code != "" {
		code = *r.Network + "." + code
	}
	site := ""
	if r.SiteClassEN1998 != nil {
		site = "ground " + *r.SiteClassEN1998 + " of EN 1998-1"
	}
	if r.SiteClassNEHRP != nil {
		site = phrase(site, "site class "+*r.SiteClassNEHRP+" of NEHRP")
	}
	instrument := ""
	if r.Instrument != nil {
		instrument = "instrument " + *r.Instrument
	}
	siting := r.Siting
	if siting == "unknown" {
		siting = "siting unknown"
	}
	return phrase(spaced(code, orEmpty(r.StationName)), siting, withNumber("Vs30 ", r.Vs30MPS, " m/s"), site, place(r.StationLatitude, r.StationLongitude), instrument)
}

// The kinds of distances, in the order in which the best is taken.
var distanceKinds = []struct {
	name string
	of   func(*RecordRow) *float64
}{
	{"rupture", func(r *RecordRow) *float64 { return r.RuptureKM }},
	{"Joyner-Boore", func(r *RecordRow) *float64 { return r.JoynerBooreKM }},
	{"hypocentral", func(r *RecordRow) *float64 { return r.HypocentralKM }},
	{"epicentral", func(r *RecordRow) *float64 { return r.EpicentralKM }},
}

// distanceKind is that of the distance that is taken, "" where it is none of these.
func (r *RecordRow) distanceKind() string {
	for _, k := range distanceKinds {
		if x := k.of(r); x != nil && r.DistanceKM != nil && *x == *r.DistanceKM {
			return k.name
		}
	}
	return ""
}

// distanceWords list the distance that is taken, where its kind is unknown, and those of each
// kind that is known.
func (r *RecordRow) distanceWords() string {
	var parts []string
	if r.distanceKind() == "" {
		parts = append(parts, withNumber("", r.DistanceKM, " km as stated"))
	}
	for _, k := range distanceKinds {
		parts = append(parts, withNumber(k.name+" ", k.of(r), " km"))
	}
	return phrase(parts...)
}

// bandWords say over which periods the spectrum can be believed.
func (r *RecordRow) bandWords() string {
	switch {
	case r.UsableFromS == nil:
		return ""
	case r.UsableToS == nil:
		return "usable from " + figure(*r.UsableFromS) + " s on"
	case *r.UsableToS < *r.UsableFromS:
		return "usable at no period"
	}
	return "usable from " + figure(*r.UsableFromS) + " to " + figure(*r.UsableToS) + " s"
}

// words say what was computed of.
func (c *ConditionedRow) words() string {
	how := "as delivered"
	if c.IsConditioned {
		how = "conditioned"
	}
	text := fmt.Sprintf("%s, %d samples %s s apart", how, c.Samples, shortest(c.StepS))
	if c.LeadS != 0 {
		text += fmt.Sprintf(", the first %s s ahead of the delivered one", figure(c.LeadS))
	}
	return text
}
