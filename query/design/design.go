package design

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"unicode"
	"unicode/utf8"
)

// standardGravity is g in m/s², exact by convention: 3rd General Conference on
// Weights and Measures, 1901, resolution 2.
const standardGravity = 9.80665

// Spectrum is an elastic design spectrum. Read makes one; the zero value is of
// no use.
type Spectrum struct {
	name    string
	words   string
	notes   []string
	damping float64
	byEta   bool // defined for other dampings too
	// direction is "horizontal", "vertical", or "" where the file does not say.
	direction string
	shape     shape
}

// shape is the form of a spectrum.
type shape interface {
	// psaG returns PSA in g at a period within the band, at the damping at which
	// Eta is eta times that of the damping for which the spectrum is defined.
	psaG(periodS, eta float64) float64
	bandS() (from, to float64)
}

// Name is what the user calls the spectrum: printable, and never empty.
func (s Spectrum) Name() string { return s.name }

// Words says on one line what the spectrum is, with its parameters.
func (s Spectrum) Words() string { return s.words }

// Notes are sentences that belong to any answer in which the spectrum stands.
func (s Spectrum) Notes() []string { return s.notes }

// HasDirection reports whether the file says of which direction the spectrum is.
func (s Spectrum) HasDirection() bool { return s.direction != "" }

// IsVertical reports whether the spectrum is of the vertical direction.
func (s Spectrum) IsVertical() bool { return s.direction == "vertical" }

// Damping returns the damping ratio for which the spectrum is defined, and
// whether it is for that one only.
func (s Spectrum) Damping() (ratio float64, fixed bool) { return s.damping, !s.byEta }

// Band returns the periods in s over which the spectrum has values, the ends
// among them; toS is +Inf where it has no end.
func (s Spectrum) Band() (fromS, toS float64) { return s.shape.bandS() }

// PSAg returns the pseudo-acceleration in g at a period in s and a damping
// ratio. It is NaN outside the band, for dampings below 0 and from 1 on, and,
// where Damping is fixed, for any other; who wants to set the spectrum beside
// ordinates of another damping asks for its own, and says so.
func (s Spectrum) PSAg(periodS, damping float64) float64 {
	from, to := s.shape.bandS()
	if !(periodS >= from && periodS <= to) || math.IsInf(periodS, 1) || !(damping >= 0 && damping < 1) {
		return math.NaN()
	}
	switch {
	case damping == s.damping:
		return s.shape.psaG(periodS, 1)
	case s.byEta:
		return s.shape.psaG(periodS, Eta(damping)/Eta(s.damping))
	}
	return math.NaN()
}

// Limits of what is read, in bytes.
const (
	maxDescription = 64 << 10
	maxTable       = 4 << 20
)

// Read reads the spectrum that a TOML file describes. A mistake in it, or in
// the table that it names, is a *FileError.
func Read(path string) (Spectrum, error) {
	text, err := readFile(path, maxDescription)
	if err != nil {
		return Spectrum{}, &FileError{Path: path, Err: err}
	}
	return parse(path, text, readFile)
}

// readFile returns what is in a file of at most so many bytes. The error does
// not name the file.
func readFile(path string, most int64) ([]byte, error) {
	info, err := os.Stat(path) // before opening: a named pipe would wait for a writer
	if err != nil {
		return nil, withoutPath(err)
	}
	if !info.Mode().IsRegular() {
		return nil, errors.New("is no file")
	}
	file, err := os.Open(path)
	if err != nil {
		return nil, withoutPath(err)
	}
	defer file.Close()
	text, err := io.ReadAll(io.LimitReader(file, most+1))
	if err == nil && int64(len(text)) > most {
		err = fmt.Errorf("is larger than %d bytes", most)
	}
	return text, withoutPath(err)
}

func withoutPath(err error) error {
	if at, ok := errors.AsType[*fs.PathError](err); ok {
		return at.Err
	}
	return err
}

// reader returns what is in a file of at most so many bytes.
type reader func(path string, most int64) ([]byte, error)

// parse reads a description; open reads the file that it may name.
func parse(path string, text []byte, open reader) (Spectrum, error) {
	k, err := parseTOML(path, text)
	if err != nil {
		return Spectrum{}, err
	}
	s := Spectrum{name: nameOf(k, path), damping: 0.05}
	switch k.word("kind", "", kinds...) {
	case kindEN1998:
		s.byEta = true
		s.readEN1998(k)
	case kindASCE7:
		s.readASCE7(k)
	case kindTable:
		s.readTable(k, open)
	}
	if k.document.err != nil {
		return Spectrum{}, k.document.err
	}
	return s, nil
}

// The kinds of spectra.
const (
	kindEN1998 = "en1998-1"
	kindASCE7  = "asce7"
	kindTable  = "table"
)

var kinds = []string{kindEN1998, kindASCE7, kindTable}

// maxName is the longest name in characters.
const maxName = 80

// nameOf returns the name that is stated, else that of the file.
func nameOf(k *keys, path string) string {
	if !k.has("name") {
		base := filepath.Base(path)
		return printable(strings.TrimSuffix(base, filepath.Ext(base)))
	}
	name := k.text("name")
	if printable(name) != name {
		k.fail("name", "want at most %d characters that can be printed, on one line", maxName)
	}
	return name
}

// printable returns a name without what cannot be printed, cut to maxName, and
// "design" for nothing.
func printable(name string) string {
	name = strings.TrimSpace(strings.Map(func(r rune) rune {
		if r == utf8.RuneError || !unicode.IsPrint(r) {
			return -1
		}
		return r
	}, name))
	if runes := []rune(name); len(runes) > maxName {
		name = strings.TrimSpace(string(runes[:maxName]))
	}
	if name == "" {
		return "design"
	}
	return name
}

// scaleByEta reads the key eta, of spectra that are for one damping.
func (s *Spectrum) scaleByEta(k *keys) {
	if k.word("eta", "none", "en1998") == "en1998" {
		s.byEta = true
		s.notes = append(s.notes, fmt.Sprintf("scaled from %s to other dampings by η of EN 1998-1, at all periods alike, as its file asks", percent(s.damping)))
	}
}
