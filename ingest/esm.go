package ingest

import "strings"

// esm reads the ASCII files of the European and Italian strong-motion archives:
// header lines "KEY: value", then the values of one component, one a line.
// Files of velocity, displacement and response spectra have the same header and
// are passed over.
//
// Sources: ITACA 2.2 user information, for keys, order, units and file names;
// published headers of the header formats DYNA 1.0 and 1.2. That north, east and
// up are positive is common practice.
type esm struct{}

// Info describes the format.
func (esm) Info() Info {
	return Info{
		Name: "esm", Title: "European and Italian strong-motion ASCII, header of KEY: value lines", Channels: "one",
		Unit: "cm/s², as stated", NotRead: "other units",
	}
}

// esmSniffLines is how many lines Sniff looks at: a header has 64.
const esmSniffLines = 70

// Sniff looks for EVENT_NAME first and for two more keys that every header has.
func (esm) Sniff(c *Content) string {
	first := nextText(c.Text, 1)
	if key, _, _ := esmKey(words(c.Text, first)); key != esmEventName {
		return ""
	}
	seen := map[string]bool{}
	for n := first; n < first+esmSniffLines; n++ {
		switch key, _, _ := esmKey(words(c.Text, n)); key {
		case esmStep, esmCount, esmUnits, esmStation, esmStream:
			seen[key] = true
		}
	}
	if len(seen) < 2 {
		return ""
	}
	return "header begins with EVENT_NAME: and has keys of DYNA headers"
}

// Parse reads the one channel of a file. Hints may repeat what the header says
// of unit and time step, not contradict it.
func (esm) Parse(content *Content, hints Hints) ([]Channel, error) {
	t := content.Text
	h, err := readESMHeader(t)
	if err != nil {
		return nil, err
	}
	if err := h.motion(t); err != nil {
		return nil, err
	}
	c := &Channel{Line: h.data}
	count, err := h.describe(c, hints)
	if err != nil {
		return nil, err
	}
	if c.Acceleration, err = oneALine(t, c.Line, count); err != nil {
		return nil, err
	}
	scale(c.Acceleration, c.UnitMPS2)
	return []Channel{*c}, nil
}

// esmSpectra are the types of response spectra by which files are named.
var esmSpectra = map[string]bool{"SA": true, "PSA": true, "SV": true, "PSV": true, "SD": true}

// motion returns a *NotMotionError where the file holds no acceleration, and a
// refusal where its parts contradict each other. The type of the data decides;
// where it is not stated the quantity of the peak does, and then the unit. Two
// columns are a table of spectra, unless the header says acceleration.
func (h *esmHeader) motion(t *Text) error {
	kind := h.at(esmType)
	quantity := quantityFromWords(kind.text)
	switch {
	case esmSpectra[strings.ToUpper(kind.text)]:
		quantity = quantitySpectra
	case quantity == "" && kind.text != "":
		return refuse(kind.line, esmType, "unknown type of data %s", found(kind.text))
	}
	peak := h.peakQuantity()
	if quantity == "" {
		quantity = peak
	}
	columns := countNumbers(t.Bytes(h.data))
	switch {
	case quantity == quantitySpectra, columns == 2 && quantity == "":
		return &NotMotionError{Reason: "spectra, not a time series"}
	case columns > 1 && quantity == quantityAcceleration:
		return refuse(h.data, "samples", "line holds %d values, expected 1", columns)
	case quantity == quantityVelocity || quantity == quantityDisplacement || quantity == quantityOther:
		return &NotMotionError{Reason: quantity + " only, no acceleration"}
	case peak != "" && peak != quantity && quantity != "":
		return refuse(kind.line, esmType, "the file holds %s, its peak is one of %s", quantity, peak)
	}
	return nil
}

// peakQuantity returns the quantity whose peak the header states, "" where it
// states none.
func (h *esmHeader) peakQuantity() string {
	for _, p := range []struct{ prefix, quantity string }{
		{"PGA_", quantityAcceleration}, {"PGV_", quantityVelocity}, {"PGD_", quantityDisplacement},
	} {
		if h.hasKey(p.prefix) {
			return p.quantity
		}
	}
	return ""
}

// oneALine reads exactly count numbers from the given line on, one a line.
func oneALine(t *Text, line, count int) ([]float64, error) {
	xs := make([]float64, 0, min(count, t.Len()-line+1))
	for n := line; n <= t.Len(); n++ {
		b := skipBlanks(t.Bytes(n))
		v, length := leadingNumber(b, '.')
		if length == 0 || length < len(b) {
			if b = trimBlanks(b); len(b) == 0 {
				continue
			}
			var ok bool
			if v, ok = parseNumber(b); !ok {
				return nil, notOneALine(n, b, count, len(xs))
			}
		}
		if len(xs) == count {
			return nil, refuse(n, "samples", "announced %d values, found more", count)
		}
		xs = append(xs, v)
	}
	if len(xs) < count {
		return nil, truncated(t.Len(), "samples", count, len(xs))
	}
	return xs, nil
}

// notOneALine says why line n, of which b is the text, is no value.
func notOneALine(n int, b []byte, count, got int) error {
	text := found(latin(b))
	switch columns := countNumbers(b); {
	case got == count:
		return refuse(n, "samples", "text %s after the %d values", text, count)
	case columns > 1:
		return refuse(n, "samples", "line holds %d values, expected 1", columns)
	}
	return refuse(n, "samples", "expected a number, found %s", text)
}

// trimBlanks returns line without the blanks at its end.
func trimBlanks(line []byte) []byte {
	for len(line) > 0 && isBlank(line[len(line)-1]) {
		line = line[:len(line)-1]
	}
	return line
}
