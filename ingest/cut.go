package ingest

import "bytes"

// cutSample is how many lines before the last one are asked how a value is written, and
// cutLeast how many of them must have one in its place.
const (
	cutSample = 8
	cutLeast  = 4
)

// refuseCut refuses a text that ends within a number: no line end follows the last one,
// and it has fewer decimals or digits of its exponent, or ends farther left, than all
// those in its place in the lines before, which agree with each other. What is left of it
// is a number too, of another size, and where the count is right nothing else shows it.
//
// The rule is our own; no source defines it.
func refuseCut(t *Text) error {
	n := t.Len()
	if t.endsLine || n <= cutLeast {
		return nil
	}
	last := numberFields(t.lines[n-1])
	if len(last) == 0 {
		return nil
	}
	at := len(last) - 1
	have, ok := shapeOf(t.lines[n-1], last[at])
	if !ok {
		return nil
	}
	var usual shape
	seen, isAligned, isShort := 0, true, false
	for i := n - 2; i >= max(0, n-1-cutSample); i-- {
		fields := numberFields(t.lines[i])
		if len(fields) <= at {
			continue
		}
		s, ok := shapeOf(t.lines[i], fields[at])
		if !ok {
			continue
		}
		if seen++; seen == 1 {
			usual = s
		}
		if s.decimals != usual.decimals || s.exponent != usual.exponent {
			return nil
		}
		isAligned = isAligned && s.end == usual.end && sameEnds(fields[:at], last[:at])
		isShort = have.decimals < usual.decimals || have.exponent < usual.exponent
	}
	if seen < cutLeast || !isShort && !(isAligned && at > 0 && have.end < usual.end) {
		return nil
	}
	text := t.lines[n-1][last[at].from:last[at].to]
	return refuse(n, "samples", "the last value %s is shorter than those before it, and no line end follows: cut off?", found(string(text)))
}

// fieldSpan is where a field stands in its line.
type fieldSpan struct{ from, to int }

// numberFields are the fields of a line between blanks, commas, semicolons and tabs.
func numberFields(line []byte) []fieldSpan {
	var out []fieldSpan
	for i := 0; i < len(line); {
		if isSeparator(rune(line[i])) {
			i++
			continue
		}
		from := i
		for i < len(line) && !isSeparator(rune(line[i])) {
			i++
		}
		out = append(out, fieldSpan{from, i})
	}
	return out
}

// sameEnds reports whether fields of two lines end in the same columns.
func sameEnds(a, b []fieldSpan) bool {
	for i := range a {
		if a[i].to != b[i].to {
			return false
		}
	}
	return true
}

// shape is how a number is written: digits behind the point and of the exponent, and the
// column in which it ends.
type shape struct{ decimals, exponent, end int }

// shapeOf reads the shape of a field; ok is false for what is no number.
func shapeOf(line []byte, f fieldSpan) (s shape, ok bool) {
	text := line[f.from:f.to]
	if _, ok := parseNumber(text); !ok {
		return s, false
	}
	s.end = f.to
	mantissa := text
	if e := bytes.IndexAny(text, "EeDd"); e >= 0 {
		mantissa, s.exponent = text[:e], len(text)-e
	}
	if point := bytes.IndexByte(mantissa, '.'); point >= 0 {
		s.decimals = len(mantissa) - point - 1
	}
	return s, true
}
