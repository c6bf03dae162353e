package db

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
)

// Difference is what of stored results is not what was computed.
type Difference struct{ Table, Text string }

// Differences compares what is stored with what was computed anew, bit for bit.
func (s Spectra) Differences(computed Spectra) (out []Difference) {
	add := func(table, format string, args ...any) {
		out = append(out, Difference{table, fmt.Sprintf(format, args...)})
	}
	if len(s.sd) != len(computed.sd) {
		add("spectrum", "%d dampings are stored, %d computed", len(s.sd), len(computed.sd))
	}
	for k := range min(len(s.sd), len(computed.sd)) {
		if n, first := differing(s.sd[k], computed.sd[k]); n > 0 {
			add("spectrum", "damping %d: %d of %d ordinates are not those computed from the samples, the first at period %d", k+1, n, len(computed.sd[k])/OrdinateWidth, first+1)
		}
	}
	for name, x := range computed.measures {
		switch y, ok := s.measures[name]; {
		case !ok:
			add("measure", "%s is lost", name)
		case math.Float64bits(x) != math.Float64bits(y):
			add("measure", "%s is stored as %.17g, and %.17g computed from the samples", name, y, x)
		}
	}
	for name := range s.measures {
		if _, ok := computed.measures[name]; !ok {
			add("measure", "%s is stored, and not computed", name)
		}
	}
	a, b := s.conditioning.key(), computed.conditioning.key()
	if a != b {
		add("conditioning", "what was done is stored as [%s], and is [%s]", a, b)
	}
	if a, b := s.conditioning.findingsKey(), computed.conditioning.findingsKey(); a != b {
		add("conditioned_finding", "findings are stored as [%s], and are [%s]", a, b)
	}
	slices.SortFunc(out, func(a, b Difference) int { return cmp.Or(cmp.Compare(a.Table, b.Table), cmp.Compare(a.Text, b.Text)) })
	return out
}

// differing counts the ordinates of two spectra that differ, with the position of the first.
func differing(a, b []byte) (n, first int) {
	width := func(sd []byte) int { return (len(sd) + OrdinateWidth - 1) / OrdinateWidth }
	at := func(sd []byte, k int) string {
		return string(sd[min(k*OrdinateWidth, len(sd)):min((k+1)*OrdinateWidth, len(sd))])
	}
	for k := max(width(a), width(b)) - 1; k >= 0; k-- {
		if at(a, k) != at(b, k) {
			n, first = n+1, k
		}
	}
	return n, first
}

// key tells two conditionings apart by every bit but those of their findings.
func (k *Conditioning) key() string {
	if k == nil {
		return "nothing"
	}
	text := fmt.Sprintf("step %s, %d samples, lead %s", exact(&k.StepS), k.Samples, exact(&k.LeadS))
	return text + fmt.Sprintf(", corners %s %s, long %s", exact(k.LowCutHz), exact(k.HighCutHz), exact(k.LongS))
}

func (k *Conditioning) findingsKey() string {
	if k == nil {
		return ""
	}
	return findingsKey(k.Findings)
}

// findingsKey tells lists of findings apart by every bit, whatever their order.
func findingsKey(findings []Finding) string {
	var lines []string
	for _, f := range findings {
		lines = append(lines, fmt.Sprintf("%s %s %s %q", f.Flag, exact(&f.Value), exact(&f.Bound), f.Words))
	}
	slices.Sort(lines)
	return strings.Join(lines, ", ")
}
