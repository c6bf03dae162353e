package ingest

import (
	"regexp"
	"strings"
)

// sitingRule is one line of the table that SitingFromWords reads.
type sitingRule struct {
	siting Siting
	why    string
	match  *regexp.Regexp
	unless *regexp.Regexp // nil, or what keeps the rule from applying
}

// sitingRules are tried in order; the first that applies decides. They see the
// text in lower case, hyphens and punctuation but the colon as blanks, and
// "grnd" or "gnd" written out. The order is that of how much the words commit
// themselves: a hole is a hole wherever it is; who writes "free field" or "on
// ground" has looked, whatever stands nearby; a part of a structure outweighs
// the level it is at; a level alone is the ground.
var sitingRules = []sitingRule{
	{SitingBorehole, "the sensor is in a hole",
		pattern(`bore ?holes?|down ?holes?|depth`), nil},
	{SitingFreeField, "free field is said in so many words",
		pattern(`free ?fields?|free fld`), nil},
	{SitingBorehole, "an instrumented soil column; its surface sensor says free field",
		pattern(`geotech|geotechnical arrays?`), nil},
	{SitingGround, "on the ground, perhaps near a structure",
		pattern(`on (?:the )?ground`),
		pattern(`on (?:the )?ground (?:floors?|flr|stor(?:e?y|eys|ies)|slab|level|lvl)`)},
	{SitingGround, "the ground leads, the rest says where",
		regexp.MustCompile(`^ground ?:`), nil},
	{SitingStructure, "on a part of a structure",
		pattern(structuralWords), nil},
	{SitingStructure, "a numbered or named level of a structure",
		pattern(`(?:\d+(?:st|nd|rd|th)|upper|lower|top|mid|main|parking) (?:level|lvl)|(?:level|lvl) \d+`), nil},
	{SitingBorehole, "below the ground, in no structure",
		pattern(`below (?:the )?(?:ground|surface|grade)|underground`), nil},
	{SitingGround, "ground level and nothing else",
		pattern(`ground|(?:at )?grade|surface`), nil},
}

// structuralWords name parts of buildings, bridges, dams, tunnels and works, and
// the abbreviations in use for them.
const structuralWords = `abut(?:ments?)?|anchorages?|arch(?:es)?|attic|basements?|bsmt|beams?|bents?|bldgs?|buildings?|bridges?|` +
	`cables?|ceilings?|cols?|columns?|crests?|culverts?|dams?|decks?|floors?|flr|footings?|foundations?|frames?|` +
	`galler(?:y|ies)|girders?|hinges?|intakes?|joists?|mezzanine|mid ?spans?|parapets?|penthouse|piers?|piles?|pile ?caps?|` +
	`pylons?|roofs?|slabs?|spans?|spillways?|stor(?:y|ey|eys|ies)|superstructure|tanks?|towers?|truss(?:es)?|tunnels?|` +
	`walls?|wharf|wharves`

// pattern matches any of the alternatives as whole words.
func pattern(alternatives string) *regexp.Regexp {
	return regexp.MustCompile(`\b(?:` + alternatives + `)\b`)
}

var (
	sitingPunctuation = regexp.MustCompile(`[^\pL\pN:]+`)
	groundSpelling    = regexp.MustCompile(`\b(?:grnd|gnd)\b`)
)

// SitingFromWords says what an instrument stands on, from the words in which
// networks describe its place: "Free Field", "On Ground: Near East Abutment",
// "Bent 3: South Column, Grnd Level". Words that name no known place, and no
// words, are SitingUnknown. Where the words leave a doubt, the answer is the one
// that keeps the motion out of ground motions.
//
// The rules are common practice; no source defines them.
func SitingFromWords(s string) Siting {
	s = strings.TrimSpace(sitingPunctuation.ReplaceAllString(strings.ToLower(s), " "))
	s = groundSpelling.ReplaceAllString(s, "ground")
	for _, r := range sitingRules {
		if r.match.MatchString(s) && (r.unless == nil || !r.unless.MatchString(s)) {
			return r.siting
		}
	}
	return SitingUnknown
}

// groundType is a ground type of EN 1998-1, with the mark of one that was inferred
// and not measured.
var groundType = regexp.MustCompile(`^([A-E]|S[12])(?:\s*\*|\s*\(.*\))?$`)

// parseGroundType returns the ground type that a text states, without its mark.
func parseGroundType(text string) (ground string, ok bool) {
	m := groundType.FindStringSubmatch(text)
	if m == nil {
		return "", false
	}
	return m[1], true
}
