package chart

import (
	"bytes"
	"errors"
	"fmt"
	"image/color"
	"io"

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
	// IsEmpty reports whether there is nothing to draw.
	IsEmpty() bool
	// Draw draws a chart that is not empty.
	Draw(c draw.Canvas)
}

// ErrNothing says that there is nothing to draw.
var ErrNothing = errors.New("nothing to draw: all values are missing or zero")

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

// Write draws a chart on white. The error is ErrNothing of one that is empty.
func Write(w io.Writer, format Format, size Size, chart Chart) error {
	canvas, out, err := newCanvas(format, size)
	if err != nil {
		return err
	}
	if chart.IsEmpty() {
		return ErrNothing
	}
	c := draw.NewCanvas(canvas, size.Width, size.Height)
	c.SetColor(color.White)
	c.Fill(c.Rectangle.Path())
	chart.Draw(c)
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
