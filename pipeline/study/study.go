package study

import (
	"path/filepath"
	"strings"
)

// Study is what a file says. Paths in it are absolute.
type Study struct {
	File string // the path by which mistakes name the file
	Dir  string // the folder that relative paths begin at

	Name             Text
	Purpose          Text // for people
	Store            Text
	Sources          []Text // files, archives and folders
	Include, Exclude []Pattern
	// Ingest has the settings of the way in: catalogue, recipe, grid and the like.
	Ingest []Setting
	// MaxDrift is the ratio of change beyond which publication is held back.
	MaxDrift *float64
	Keep     int // editions to keep; 0 where the file does not say
	State    Text
	Metrics  Text
	Report   Text // the page of all answers

	// Reads and Writes are the paths of what a run reads and writes beside the study
	// itself, with the keys that give them, in the order of the file.
	Reads, Writes []Setting

	Selections []Selection // in the order of the file, as are Products
	Products   []Product
}

// Text is a value and where it stands.
type Text struct {
	Value string
	Line  int // 0 for a value that was not given
}

// Setting is the value of a flag: text as the command line would have it.
type Setting struct {
	Key string
	Text
}

// Selection is a set of motions that products may name.
type Selection struct {
	Name     string
	Line     int
	Settings []Setting
}

// Path names the table of the selection, "selection.rock".
func (s Selection) Path() string { return "selection." + s.Name }

// Product is a question that is asked after every run.
type Product struct {
	Kind      Kind
	Name      string
	Line      int
	Selection string    // "" where it names none
	Settings  []Setting // with those of the selection before them
	Files     []File

	own []Setting // without them
}

// Path names the table of the product, "spectrum.rock".
func (p Product) Path() string { return string(p.Kind) + "." + p.Name }

// Kind is what a product asks for: the name of its command, and of its tables.
type Kind string

// The kinds of products.
const (
	Spectrum Kind = "spectrum"
	Demand   Kind = "demand"
	Records  Kind = "records"
)

// Kinds returns all kinds.
func Kinds() []Kind { return []Kind{Spectrum, Demand, Records} }

// File is a file that a product is written to, in the format of its extension.
type File struct {
	Text
	Format Format
}

// Format is the extension of a product's file.
type Format string

// The formats of files.
const (
	CSV  Format = "csv"
	JSON Format = "json"
	TXT  Format = "txt" // tables for people
	SVG  Format = "svg" // figures
	PNG  Format = "png"
	HTML Format = "html" // the report, of no single product
)

// IsFigure reports whether a file of the format is a figure.
func (f Format) IsFigure() bool { return f == SVG || f == PNG }

// Vocabulary is what commands accept in a study, by their flags.
type Vocabulary struct {
	Ingest    []Flag
	Selection []Flag
	Products  map[Kind][]Flag
}

// Flag is a flag that may stand in a study as a key.
type Flag struct {
	Name string
	Form Form
	// IsFile says that the value is a path, but for Words.
	IsFile bool
	Words  []string
	// IsNeeded says that a study must say it.
	IsNeeded bool
}

// Form is how a flag takes values.
type Form int

// The forms of flags. A list may be a file's name after @.
const (
	Single   Form = iota // one text, number or date
	List                 // one text with commas, or a list
	Repeated             // one text, or several in a list
	Switch               // true or false
)

// At returns a path of the file as it can be opened from anywhere.
func (s *Study) At(path string) string {
	if filepath.IsAbs(path) {
		return filepath.Clean(path)
	}
	return filepath.Join(s.Dir, path)
}

// Path is that of the study's own file.
func (s *Study) Path() string { return filepath.Join(s.Dir, filepath.Base(s.File)) }

// Short returns a path for people: relative to the study's folder if it lies there.
func (s *Study) Short(path string) string {
	if !filepath.IsAbs(path) {
		return path
	}
	below, err := filepath.Rel(s.Dir, path)
	if err != nil || below == ".." || strings.HasPrefix(below, ".."+string(filepath.Separator)) {
		return path
	}
	return below
}

// Mistake is a mistake of this study's file.
func (s *Study) Mistake(line int, key string, err error) *Mistake {
	return &Mistake{Path: s.File, Line: line, Key: key, Err: err}
}
