package chart

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"io"
	"regexp"
	"strings"

	"golang.org/x/image/font"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	plotfont "gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// outlined draws text as outlines, so that it looks the same wherever the font is absent. A
// glyph is drawn once, in a definition to which all places refer where it stands. The words
// themselves go into the file's description, for screen readers and search.
type outlined struct {
	*vgsvg.Canvas
	words    []string
	elements []string // what stands for the words, in their order
	glyphs   glyphs
}

// FillString draws a text. Its place in the file is kept by an empty one.
func (o *outlined) FillString(f plotfont.Face, at vg.Point, text string) {
	o.words = append(o.words, text)
	o.elements = append(o.elements, o.glyphs.element(f, at, text))
	o.Canvas.FillString(f, at, "")
}

var (
	emptyText = regexp.MustCompile(`<text [^>]*></text>`)
	fill      = regexp.MustCompile(`fill:(#[0-9A-Fa-f]{6})`)
)

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
	o.writeWords(&out)
	fmt.Fprintf(&out, "<defs>\n%s</defs>\n", o.glyphs.definitions.String())
	next := 0
	out.Write(emptyText.ReplaceAllFunc(rest, func(text []byte) []byte {
		colour := ""
		if m := fill.FindSubmatch(text); m != nil {
			colour = ` fill="` + string(m[1]) + `"`
		}
		next++
		return []byte(strings.Replace(o.elements[next-1], "<g", "<g"+colour, 1))
	}))
	return out.WriteTo(w)
}

// writeWords writes the title and the description.
func (o *outlined) writeWords(out *bytes.Buffer) {
	for i, words := range o.words {
		open, end := "", "\n"
		switch i {
		case 0:
			open, end = "<title>", "</title>\n"
		case 1:
			open = "<desc>"
		}
		out.WriteString(open)
		xml.EscapeText(out, []byte(words)) // a buffer takes all
		out.WriteString(end)
	}
	if len(o.words) > 1 {
		out.WriteString("</desc>\n")
	}
}

// glyphs are the outlines that a file has.
type glyphs struct {
	ids         map[glyph]string
	definitions bytes.Buffer
}

// glyph is one of a font, of any size.
type glyph struct {
	font  string
	index sfnt.GlyphIndex
}

// element is a text whose baseline begins at a point, in units of the font and upwards, as the
// whole of the chart is.
func (g *glyphs) element(f plotfont.Face, at vg.Point, text string) string {
	var buffer sfnt.Buffer
	var b strings.Builder
	perEm := fixed.Int26_6(f.Face.UnitsPerEm())
	fmt.Fprintf(&b, `<g transform="translate(%.2f %.2f) scale(%.5g)">`, at.X.Points(), at.Y.Points(), f.Font.Size.Points()/float64(perEm))
	x, before := 0, sfnt.GlyphIndex(0)
	for i, r := range text {
		index, err := f.Face.GlyphIndex(&buffer, r)
		if err != nil {
			continue
		}
		if i > 0 {
			if kern, err := f.Face.Kern(&buffer, before, index, perEm, font.HintingNone); err == nil {
				x += int(kern)
			}
		}
		before = index
		if id := g.id(f, &buffer, index); id != "" {
			fmt.Fprintf(&b, `<use xlink:href="#%s" x="%d"/>`, id, x)
		}
		if advance, err := f.Face.GlyphAdvance(&buffer, index, perEm, font.HintingNone); err == nil {
			x += int(advance)
		}
	}
	b.WriteString("</g>")
	return b.String()
}

// id names the definition of a glyph, "" of one without ink.
func (g *glyphs) id(f plotfont.Face, buffer *sfnt.Buffer, index sfnt.GlyphIndex) string {
	key := glyph{f.Name(), index}
	if id, ok := g.ids[key]; ok {
		return id
	}
	if g.ids == nil {
		g.ids = map[glyph]string{}
	}
	id := ""
	segments, err := f.Face.LoadGlyph(buffer, index, fixed.Int26_6(f.Face.UnitsPerEm()), nil)
	if err == nil && len(segments) > 0 {
		id = fmt.Sprintf("g%d", len(g.ids))
		fmt.Fprintf(&g.definitions, "<path id=%q d=%q/>\n", id, outline(segments))
	}
	g.ids[key] = id
	return id
}

// outline is the path of a glyph, whose axis points down, in units of the font and upwards.
func outline(segments sfnt.Segments) string {
	var b strings.Builder
	for i, s := range segments {
		points := map[sfnt.SegmentOp]struct {
			letter string
			n      int
		}{sfnt.SegmentOpMoveTo: {"M", 1}, sfnt.SegmentOpLineTo: {"L", 1}, sfnt.SegmentOpQuadTo: {"Q", 2}, sfnt.SegmentOpCubeTo: {"C", 3}}[s.Op]
		if s.Op == sfnt.SegmentOpMoveTo && i > 0 {
			b.WriteByte('Z')
		}
		b.WriteString(points.letter)
		for k, p := range s.Args[:points.n] {
			if k > 0 {
				b.WriteByte(' ')
			}
			fmt.Fprintf(&b, "%d %d", int(p.X), -int(p.Y))
		}
	}
	b.WriteByte('Z')
	return b.String()
}
