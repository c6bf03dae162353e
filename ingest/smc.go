package ingest

import (
	"bytes"
	"errors"
	"math"
	"regexp"
	"strings"
)

// smc reads the accelerogram files of the National Strong-Motion Program of the
// U.S. Geological Survey: 11 lines of text, 48 integers, 50 reals, comments, and
// one series of one component in fields of ten characters.
//
// Sources: USGS National Strong-Motion Program, "SMC- and BBF-format data files",
// and USGS Digital Data Series DDS-7, technical information, for the order of
// the parts and the series of a file. The positions in the tables of integers
// and reals are from memory; whatever the text lines say too is compared.
type smc struct{}

// The parts of a file, by line.
const (
	smcTextLines    = 11
	smcIntegerLine  = smcTextLines + 1
	smcIntegerCount = 48
	smcRealLine     = smcIntegerLine + 6
	smcRealCount    = 50
	smcCommentLine  = smcRealLine + 10
)

var (
	smcIntegers = fieldLayout{perLine: 8, width: 10}
	smcReals    = fieldLayout{perLine: 5, width: 15, decimals: pointExplicit}
	smcSeries   = fieldLayout{perLine: 8, width: 10, decimals: pointExplicit}
)

// The kinds of data, by the figure that line 1 begins with.
const (
	smcUncorrected = 1
	smcCorrected   = 2
)

var smcTitle = regexp.MustCompile(`(?i)^\s*([1-6]) +(uncorrected accel|corrected accel|velocity|displacement|response spectr|fourier (?:amplitude )?spectr)`)

// smcKinds are the words of line 1 in the order of their figures, cut to what
// tells them apart, and the reasons to pass over all but accelerograms.
var smcKinds = [...]struct{ words, reason string }{
	{"uncorrected", ""},
	{"corrected", ""},
	{"velocity", "velocity series, not acceleration"},
	{"displacement", "displacement series, not acceleration"},
	{"response", "response spectra, not a time series"},
	{"fourier", "Fourier spectra, not a time series"},
}

// Info describes the format.
func (smc) Info() Info {
	return Info{
		Name: "smc", Title: "SMC text (USGS National Strong-Motion Program)", Channels: "one",
		Unit: "cm/s²; of uncorrected files as stated", NotRead: "uncorrected records of uneven steps",
	}
}

// Sniff looks for figure and words of line 1 and for one of the two tables at
// its place. Both are there in whole files; with one of them damaged, the file
// is still refused as what it is.
func (smc) Sniff(c *Content) string {
	t := c.Text
	m := smcTitle.FindString(words(t, 1))
	if m == "" || !isNumberLine(t.Bytes(smcIntegerLine), smcIntegers) && !isNumberLine(t.Bytes(smcRealLine), smcReals) {
		return ""
	}
	return "line 1 says " + found(strings.TrimSpace(m)) + " over tables of integers and reals"
}

// isNumberLine reports whether all fields of a line in the given layout are
// numbers or blank, and at least one is a number. Fields without decimals must
// be integers.
func isNumberLine(b []byte, l fieldLayout) bool {
	numbers := 0
	for i := 0; i < l.perLine && len(b) > 0; i++ {
		field := b[:min(l.width, len(b))]
		b = b[len(field):]
		field = bytes.TrimSpace(field)
		if len(field) == 0 {
			continue
		}
		v, ok := parseNumber(field)
		if !ok || l.decimals == 0 && v != math.Trunc(v) {
			return false
		}
		numbers++
	}
	return numbers > 0 && len(bytes.TrimSpace(b)) == 0
}

// Parse reads the one channel of a file. Velocities, displacements and spectra
// are *NotMotionError.
func (smc) Parse(content *Content, hints Hints) ([]Channel, error) {
	h, err := readSMCHeader(content.Text)
	if err != nil {
		return nil, err
	}
	if reason := smcKinds[h.kind-1].reason; reason != "" {
		return nil, &NotMotionError{reason}
	}
	c := &Channel{Processing: ProcessingCorrected}
	if h.kind == smcUncorrected {
		c.Processing = ProcessingRaw
	}
	line, err := h.passComments(c)
	if err != nil {
		return nil, err
	}
	c.Line = line
	if err := h.describe(c); err != nil {
		return nil, err
	}
	if c.StepS, err = h.step(c, hints); err != nil {
		return nil, err
	}
	if err := h.samples(c); err != nil {
		return nil, err
	}
	if err := h.unit(c, hints); err != nil {
		return nil, err
	}
	scale(c.Acceleration, c.UnitMPS2)
	return []Channel{*c}, nil
}

// samples reads the series, in the unit of the file, and holds the file to end
// with it.
func (h *smcHeader) samples(c *Channel) error {
	count, err := h.count()
	if err != nil {
		return err
	}
	layout := smcSeries
	if hasBareExponent(h.text.Bytes(c.Line), layout.width) {
		layout.decimals = bareExponent
	}
	xs, next, err := layout.series(h.text, c.Line, count, "samples")
	if err != nil {
		return err
	}
	if at := nextText(h.text, next); at <= h.text.Len() {
		b := bytes.TrimSpace(h.text.Bytes(at))
		if startsNumber(b) {
			return refuse(at, "samples", "more values than the %d announced", count)
		}
		return refuse(at, "samples", "text %s after the %d values", found(latin(b)), count)
	}
	for i, x := range xs {
		if h.isRealNull(x) {
			return refuse(c.Line+i/layout.perLine, "samples", "value %d is %g, which stands for no value", i+1, x)
		}
	}
	if h.kind == smcUncorrected && isTimed(xs) {
		return refuse(c.Line, "samples", "uneven uncorrected record: times and amplitudes in pairs")
	}
	c.Acceleration = xs
	h.compareLength(c)
	return nil
}

// hasBareExponent reports whether the first field of a line has an exponent
// without its letter.
func hasBareExponent(line []byte, width int) bool {
	_, ok := parseBareExponent(bytes.TrimSpace(line[:min(width, len(line))]))
	return ok
}

// isTimed reports whether every other value is a time that grows, as in records
// that were read off film.
func isTimed(xs []float64) bool {
	if len(xs) < 2*MinSamples || len(xs)%2 != 0 || xs[0] < 0 {
		return false
	}
	for i := 2; i < len(xs); i += 2 {
		if xs[i] <= xs[i-2] {
			return false
		}
	}
	return true
}

// count returns the number of values of integer 17.
func (h *smcHeader) count() (int, error) {
	n := h.integer(17)
	if !n.Known || n.Value < 1 || n.Value > math.MaxInt32 {
		return 0, refuse(h.integers.line(17), h.integers.what(17), "%s is not a number of values",
			found(strings.TrimSpace(string(h.integers.field(17)))))
	}
	return int(n.Value), nil
}

// The sampling rates that are read, in 1/s, and how near to an integer, relative,
// a rate is taken for it.
const (
	smcMinRate  = 1
	smcMaxRate  = 2000
	smcNearRate = 1e-4
)

// step returns the time step in s, from the rate in real 2. A file without it is
// uneven if it is uncorrected; else a hint may state it.
func (h *smcHeader) step(c *Channel, hints Hints) (float64, error) {
	line := h.reals.line(2)
	rate := h.real(2)
	switch {
	case rate.Value == 0 && h.kind == smcUncorrected:
		return 0, refuse(line, "dt", "uneven uncorrected record: the header states no sampling rate")
	case rate.Value == 0 && hints.StepS > 0:
		return hints.StepS, nil
	case rate.Value == 0:
		return 0, refuse(line, "dt", "the file states no time step: give it with --dt or in the catalogue's dt_s column")
	case !(rate.Value >= smcMinRate && rate.Value <= smcMaxRate):
		return 0, refuse(line, "dt", "sampling rate %g /s is outside %d to %d /s", rate.Value, smcMinRate, smcMaxRate)
	}
	near := math.Round(rate.Value)
	off := math.Abs(rate.Value-near) / near
	if off > smcNearRate {
		near = rate.Value
	} else if off > 1e-6 { // beyond what single precision does to a number
		c.warn("sampling rate %g /s taken for %g /s", rate.Value, near)
	}
	return 1 / near, checkStep(1/near, line, hints)
}

// smcUnit is a comment that states the unit of the series.
var smcUnit = regexp.MustCompile(`(?i)^\s*\|\s*(?:(?:data|acceleration|series|samples?)\s+)?units?\s*(?:are|is|of|in|:|=)\s*(.+)$`)

// unit settles the unit of the samples, which are read. Corrected series are in
// cm/s², and no comment may say otherwise. The unit of an uncorrected one is that
// of a comment, or cm/s² where the samples reach the peak that the header states
// in cm/s².
func (h *smcHeader) unit(c *Channel, hints Hints) error {
	stated := h.statedUnit()
	const own = "cm/s2"
	switch {
	case h.kind == smcCorrected && stated.text != "":
		if u, err := ParseUnit(stated.text); err != nil || u.MPS2 != 0.01 {
			return refuse(stated.line, "unit", "the comment says %s, corrected series of this layout are in %s", stated.text, own)
		}
	case h.kind == smcCorrected:
		stated = statement{own, 1}
	case stated.text == "" && h.reaches(c):
		stated = statement{own, h.reals.line(29)}
	}
	unit, warning, err := chooseUnit(stated, hints)
	if err != nil {
		return err
	}
	if warning != "" {
		c.warn("%s", warning)
	}
	c.Unit, c.UnitMPS2 = unit.Name, unit.MPS2
	return nil
}

// statedUnit returns the unit that a comment states for the series; comments on
// units of something else are none.
func (h *smcHeader) statedUnit() statement {
	for line := smcCommentLine; line < h.comments; line++ {
		m := smcUnit.FindStringSubmatch(words(h.text, line))
		if m == nil {
			continue
		}
		text := unitToken(m[1])
		if _, err := ParseUnit(text); err == nil || errors.Is(err, errCounts) {
			return statement{text, line}
		}
	}
	return statement{}
}

// reaches reports whether the samples, taken for cm/s², reach the header's peak
// within 1 %.
func (h *smcHeader) reaches(c *Channel) bool {
	peak := 0.0
	for _, x := range c.Acceleration {
		peak = max(peak, math.Abs(x))
	}
	want := math.Abs(c.HeaderPeak.Value) * 100
	return want > 0 && math.Abs(peak-want) <= 0.01*want
}

// compareLength compares the length of the series with the one that a comment
// states.
func (h *smcHeader) compareLength(c *Channel) {
	for line := smcCommentLine; line < h.comments; line++ {
		m := smcLength.FindStringSubmatch(words(h.text, line))
		if m == nil {
			continue
		}
		if length := decimal(m[1]); !lengthAgrees(length, c.StepS, len(c.Acceleration)) {
			c.warn("%d values every %g s do not last the %g s of the comment in line %d", len(c.Acceleration), c.StepS, length, line)
		}
		return
	}
}

var smcLength = regexp.MustCompile(`(?i)\b(?:duration|record length|length of (?:record|series))\b[ :=]*(?:of |is )?(\d+(?:\.\d*)?) *s(?:ec|econds?)?\b`)
