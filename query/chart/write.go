package chart

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image/color"
	"io"

	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	plotfont "gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Format is how a chart is written.
type Format string

// The formats.
const (
	SVG Format = "svg"
	PNG Format = "png"
	// Inline is an element of SVG for a page, whose text is text in the page's fonts.
	Inline Format = "inline"
)

// Chart can be drawn on a canvas.
type Chart interface {
	// Draw returns an error where there is nothing to draw.
	Draw(c draw.Canvas) error
}

// Size is that of a chart on paper.
type Size struct{ Width, Height vg.Length }

// Half is half an A4 page with margins of 2 cm, in landscape proportions.
var Half = Size{17 * vg.Centimeter, 12 * vg.Centimeter}

// Square is as wide, and as high.
var Square = Size{17 * vg.Centimeter, 17 * vg.Centimeter}

// Page is an A4 page with margins of 2 cm.
var Page = Size{17 * vg.Centimeter, 25.7 * vg.Centimeter}

// dotsPerInch is the resolution of PNG: fine in print at half a page.
const dotsPerInch = 200

// Write draws a chart on white.
func Write(w io.Writer, format Format, size Size, chart Chart) error {
	canvas, out, err := newCanvas(format, size)
	if err != nil {
		return err
	}
	c := draw.NewCanvas(canvas, size.Width, size.Height)
	c.SetColor(color.White)
	c.Fill(c.Rectangle.Path())
	if err := chart.Draw(c); err != nil {
		return err
	}
	_, err = out.WriteTo(w)
	return err
}

func newCanvas(format Format, size Size) (vg.Canvas, io.WriterTo, error) {
	switch format {
	case SVG:
		svg := &outlined{Canvas: vgsvg.New(size.Width, size.Height)}
		return svg, svg, nil
	case Inline:
		svg := &inlined{vgsvg.New(size.Width, size.Height)}
		return svg, svg, nil
	case PNG:
		img := vgimg.NewWith(vgimg.UseWH(size.Width, size.Height), vgimg.UseDPI(dotsPerInch))
		return img, vgimg.PngCanvas{Canvas: img}, nil
	}
	return nil, nil, fmt.Errorf("unknown format %q of a figure; accepted: svg, png", string(format))
}

// inlined leaves text as it is.
type inlined struct{ *vgsvg.Canvas }

// WriteTo writes the element alone.
func (e *inlined) WriteTo(w io.Writer) (int64, error) {
	var file bytes.Buffer
	if _, err := e.Canvas.WriteTo(&file); err != nil {
		return 0, err
	}
	if at := bytes.Index(file.Bytes(), []byte("<svg ")); at > 0 {
		file.Next(at)
	}
	return file.WriteTo(w)
}

// outlined draws text as outlines, so that it looks the same wherever the font is absent. The
// words themselves go into the file's description, for screen readers and search.
type outlined struct {
	*vgsvg.Canvas
	words []string
}

// FillString draws the outlines of a text.
func (o *outlined) FillString(f plotfont.Face, at vg.Point, text string) {
	o.words = append(o.words, text)
	if path := outline(f, at, text); len(path) > 0 {
		o.Fill(path)
	}
}

// WriteTo writes the file, its first words as the title.
func (o *outlined) WriteTo(w io.Writer) (int64, error) {
	var file bytes.Buffer
	if _, err := o.Canvas.WriteTo(&file); err != nil {
		return 0, err
	}
	head, rest, _ := bytes.Cut(file.Bytes(), []byte("xlink\">\n")) // the end of the element svg
	var out bytes.Buffer
	out.Write(head)
	out.WriteString("xlink\" role=\"img\">\n")
	for i, words := range o.words {
		open, end := "", "\n"
		switch i {
		case 0:
			open, end = "<title>", "</title>\n"
		case 1:
			open = "<desc>"
		}
		out.WriteString(open)
		xml.EscapeText(&out, []byte(words)) // a buffer takes all
		out.WriteString(end)
	}
	if len(o.words) > 1 {
		out.WriteString("</desc>\n")
	}
	out.Write(rest)
	return out.WriteTo(w)
}

// outline is the path of a text whose baseline begins at a point.
func outline(f plotfont.Face, at vg.Point, text string) (path vg.Path) {
	var buffer sfnt.Buffer
	perEm := fixed.Int26_6(f.Face.UnitsPerEm())
	unit := f.Font.Size / vg.Length(perEm)
	var before sfnt.GlyphIndex
	for i, r := range text {
		glyph, err := f.Face.GlyphIndex(&buffer, r)
		if err != nil {
			continue
		}
		if i > 0 {
			if kern, err := f.Face.Kern(&buffer, before, glyph, perEm, font.HintingNone); err == nil {
				at.X += vg.Length(kern) * unit
			}
		}
		before = glyph
		segments, err := f.Face.LoadGlyph(&buffer, glyph, perEm, nil)
		if err != nil {
			continue
		}
		appendGlyph(&path, segments, at, unit)
		if advance, err := f.Face.GlyphAdvance(&buffer, glyph, perEm, font.HintingNone); err == nil {
			at.X += vg.Length(advance) * unit
		}
	}
	return path
}

// appendGlyph adds the contours of a glyph, whose axis points down, to a path.
func appendGlyph(path *vg.Path, segments sfnt.Segments, at vg.Point, unit vg.Length) {
	point := func(p fixed.Point26_6) vg.Point {
		return vg.Point{X: at.X + vg.Length(p.X)*unit, Y: at.Y - vg.Length(p.Y)*unit}
	}
	isOpen := false
	for _, s := range segments {
		switch s.Op {
		case sfnt.SegmentOpMoveTo:
			if isOpen {
				path.Close()
			}
			isOpen = true
			path.Move(point(s.Args[0]))
		case sfnt.SegmentOpLineTo:
			path.Line(point(s.Args[0]))
		case sfnt.SegmentOpQuadTo:
			path.QuadTo(point(s.Args[0]), point(s.Args[1]))
		case sfnt.SegmentOpCubeTo:
			path.CubeTo(point(s.Args[0]), point(s.Args[1]), point(s.Args[2]))
		}
	}
	if isOpen {
		path.Close()
	}
}
