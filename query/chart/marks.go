package chart

import (
	"cmp"
	"image/color"
	"slices"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Mark is a period or, where ToS is greater, a band of them.
type Mark struct {
	Name       string
	FromS, ToS float64
}

// on is the part of a mark that an axis has, if any.
func (m *Mark) on(x *axis) (fromS, toS float64, ok bool) {
	fromS, toS = max(m.FromS, x.from), min(max(m.FromS, m.ToS), x.to)
	return fromS, toS, fromS <= toS
}

// outside is a note on the marks that an axis has no part of.
func outside(marks []Mark, x *axis) []string {
	var names []string
	for _, m := range marks {
		if _, _, ok := m.on(x); !ok {
			names = append(names, m.Name)
		}
	}
	return notShown(names)
}

// notShown is a note on what was asked for and cannot be marked, none of nothing.
func notShown(names []string) []string {
	if names == nil {
		return nil
	}
	return []string{"not marked, as nothing is drawn there: " + strings.Join(names, ", ")}
}

// flag is where a mark is drawn, and its name, which stands above the frame, where no curve is.
type flag struct {
	name     string
	from, to vg.Length // to the right
	row      int       // of the name, upwards from the frame; -1 for none
}

const (
	flagGap  vg.Length = 3 // between a line and the name at its end
	flagRows int       = 6 // beyond these a line has no name: periods are on the axis
)

var (
	markLine = draw.LineStyle{Color: mark, Width: 0.9}
	markVeil = color.NRGBA{mark.R, mark.G, mark.B, 0x16} // over a band
)

// flags are those of marks, from right to left. A name begins at its line, which goes up to it;
// so one whose line ends below another's name is written lower than that.
func (f *frame) flags(marks []Mark) []flag {
	var out []flag
	for _, m := range marks {
		if from, to, ok := m.on(&f.x); ok {
			out = append(out, flag{name: m.Name, from: f.point(from, f.y.from).X, to: f.point(to, f.y.from).X})
		}
	}
	slices.SortStableFunc(out, func(a, b flag) int { return cmp.Compare(b.from, a.from) })
	style := writing(labelSize, mark)
	for i := range out {
		end := out[i].from + 2*flagGap + style.Width(out[i].name)
		for _, other := range out[:i] {
			if other.from < end {
				out[i].row = max(out[i].row, other.row+1)
			}
		}
	}
	for i := range out {
		if out[i].row >= flagRows {
			out[i].row = -1
		}
	}
	return out
}

// flagRoom is the height that names of marks take above a frame.
func (f *frame) flagRoom(marks []Mark) (room vg.Length) {
	for _, l := range f.flags(marks) {
		room = max(room, flagGap+lineRoom*vg.Length(l.row+1))
	}
	return room
}

// drawMarks marks periods and bands, with their names above the frame, as far as a room beside
// it.
func (f *frame) drawMarks(marks []Mark, beside vg.Length) {
	style := writing(labelSize, mark)
	for _, l := range f.flags(marks) {
		top := f.Max.Y
		if l.row >= 0 {
			top += lineRoom * (vg.Length(l.row) + 0.5)
			at := vg.Point{X: l.from + flagGap, Y: top}
			f.FillText(style, at, shorten(style, l.name, f.Max.X+beside-at.X))
		}
		f.StrokeLine2(markLine, l.from, f.Min.Y, l.from, top)
		if l.to > l.from {
			f.StrokeLines(markLine, []vg.Point{{X: l.from, Y: f.Max.Y}, {X: l.to, Y: f.Max.Y}, {X: l.to, Y: f.Min.Y}})
			f.FillPolygon(markVeil, []vg.Point{{X: l.from, Y: f.Min.Y}, {X: l.from, Y: f.Max.Y}, {X: l.to, Y: f.Max.Y}, {X: l.to, Y: f.Min.Y}})
		}
	}
}
