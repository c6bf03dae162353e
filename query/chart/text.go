package chart

import (
	"image/color"
	"math"
	"strings"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// fonts are the faces of all charts: Liberation Sans, which travels with the program.
var fonts = font.NewCache(liberation.Collection())

// The sizes of text.
const (
	titleSize vg.Length = 11
	labelSize vg.Length = 8
	noteSize  vg.Length = 6.5
)

// writing is a style of text that is placed by its left end and middle.
func writing(size vg.Length, c color.Color) draw.TextStyle {
	return draw.TextStyle{
		Color: c, Font: font.Font{Typeface: "Liberation", Variant: "Sans", Size: size},
		XAlign: draw.XLeft, YAlign: draw.YCenter, Handler: text.Plain{Fonts: fonts},
	}
}

// bold is a style of titles.
func bold(size vg.Length, c color.Color) draw.TextStyle {
	s := writing(size, c)
	s.Font.Weight = xfont.WeightBold
	return s
}

// upwards turns a style to read from below.
func upwards(s draw.TextStyle) draw.TextStyle {
	s.Rotation = math.Pi / 2
	s.XAlign = draw.XCenter
	return s
}

// fitting is a style of labels or, where words need that to have room, of notes.
func fitting(c color.Color, words string, width vg.Length) draw.TextStyle {
	if s := writing(labelSize, c); s.Width(words) <= width {
		return s
	}
	return writing(noteSize, c)
}

// shorten cuts a text to a width, with an ellipsis.
func shorten(s draw.TextStyle, words string, width vg.Length) string {
	if s.Width(words) <= width {
		return words
	}
	runes := []rune(words)
	for len(runes) > 0 && s.Width(string(runes)+"…") > width {
		runes = runes[:len(runes)-1]
	}
	return string(runes) + "…"
}

// wrap breaks a text between words into lines of a width, as many as there may be; what has no
// room is cut from the last.
func wrap(s draw.TextStyle, words string, width vg.Length, most int) (lines []string) {
	line := ""
	for word := range strings.FieldsSeq(words) {
		longer := strings.TrimSpace(line + " " + word)
		if line != "" && s.Width(longer) > width {
			lines, longer = append(lines, line), word
		}
		line = shorten(s, longer, width)
	}
	if lines = append(lines, line); len(lines) > most {
		lines[most-1] = shorten(s, strings.Join(lines[most-1:], " "), width)
		lines = lines[:most]
	}
	return lines
}
