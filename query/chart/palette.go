package chart

import (
	"image/color"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Colours of our own, dark enough on white for thin lines and apart for colour-blind eyes
// (TestColoursAreApart); lines differ in their dashes too, for print in grey.
var (
	ink     = color.NRGBA{0x1e, 0x24, 0x2c, 0xff} // text, axes
	paper   = color.NRGBA{0xff, 0xff, 0xff, 0xd8} // behind words that lie on curves
	quiet   = color.NRGBA{0x5a, 0x63, 0x70, 0xff} // notes
	rule    = color.NRGBA{0xe2, 0xe5, 0xe9, 0xff} // lines of the grid
	faint   = color.NRGBA{0xc3, 0xc9, 0xd1, 0xff} // single spectra, of which there are many
	dim     = color.NRGBA{0x86, 0x8e, 0x99, 0xff} // few of them, lines from curves to their names
	shade   = color.NRGBA{0xd6, 0xe4, 0xf0, 0xff} // counts
	veil    = color.NRGBA{0x0a, 0x47, 0x7e, 0x30} // between percentiles, over single spectra
	deep    = color.NRGBA{0x0a, 0x47, 0x7e, 0xff} // percentiles
	warm    = color.NRGBA{0x9c, 0x5d, 0x00, 0xff} // mean
	plum    = color.NRGBA{0x96, 0x3c, 0xd8, 0xff} // envelope
	mark    = color.NRGBA{0x9b, 0x1c, 0x31, 0xff} // structure
	tone    = color.NRGBA{0x0b, 0x6b, 0x4f, 0xff} // one record
	designs = color.NRGBA{0x00, 0x00, 0x00, 0xff} // design spectrum
)

// Kind says what a curve is, by which it is drawn.
type Kind int

// The kinds of curves.
const (
	Median Kind = iota
	Percentile
	Mean
	Envelope
	Design
	Capacity
	// Of one record: its directions, and its dampings, of which one is that of most questions;
	// the others are those of OtherDamping.
	FirstHorizontal
	SecondHorizontal
	Vertical
	AllDirections
	UsuallyDamped
	otherDamping
)

// OtherDamping is the kind of the nth damping, counted from 0, beside the usual one.
func OtherDamping(nth int) Kind { return otherDamping + Kind(nth%otherDampings) }

// otherDampings is how many of them look different.
const otherDampings = 7

// styles are the lines of the kinds.
var styles = map[Kind]draw.LineStyle{
	Median:     {Color: deep, Width: 1.8},
	Percentile: {Color: deep, Width: 0.8},
	Mean:       {Color: warm, Width: 1.4, Dashes: []vg.Length{7, 2.5}},
	Envelope:   {Color: plum, Width: 1, Dashes: []vg.Length{1.2, 2}},
	Design:     {Color: designs, Width: 1.6, Dashes: []vg.Length{9, 2.5, 2, 2.5}},
	Capacity:   {Color: mark, Width: 1.4},

	FirstHorizontal:  {Color: tone, Width: 1},
	SecondHorizontal: {Color: tone, Width: 1, Dashes: []vg.Length{5, 1.8}},
	Vertical:         {Color: tone, Width: 1, Dashes: []vg.Length{1.2, 1.8}},
	AllDirections:    {Color: tone, Width: 2},
	UsuallyDamped:    {Color: tone, Width: 1.8},
	otherDamping + 0: {Color: tone, Width: 0.8, Dashes: []vg.Length{1.2, 1.8}},
	otherDamping + 1: {Color: tone, Width: 0.8, Dashes: []vg.Length{4.5, 1.6}},
	otherDamping + 2: {Color: tone, Width: 0.8},
	otherDamping + 3: {Color: tone, Width: 0.8, Dashes: []vg.Length{7, 1.8, 1.2, 1.8}},
	otherDamping + 4: {Color: tone, Width: 1.1, Dashes: []vg.Length{11, 2.2}},
	otherDamping + 5: {Color: tone, Width: 1.1, Dashes: []vg.Length{2.4, 2.4}},
	otherDamping + 6: {Color: tone, Width: 1.1, Dashes: []vg.Length{7, 1.8, 1.2, 1.8, 1.2, 1.8}},
}

// hair is the width of single spectra.
const hair vg.Length = 0.5

// few is how many single spectra a reader may want to follow one by one. More are a background
// to their statistics, and darken it by themselves where they lie close.
const few = 10

// single is the colour of n single spectra.
func single(n int) color.NRGBA {
	if n <= few {
		return dim
	}
	return faint
}
