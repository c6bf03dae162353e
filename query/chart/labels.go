package chart

import (
	"cmp"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// label names a curve at the right of a frame, with a line to where the curve ends.
type label struct {
	words string
	style draw.LineStyle
	from  vg.Point
}

// labelStep is the least distance of two labels.
const labelStep = labelSize + 2

// drawLabels writes the labels in a room beside the frame, in the order of their curves' ends,
// as near to these as they find room.
func drawLabels(f *frame, room vg.Length, labels []label) {
	slices.SortStableFunc(labels, func(a, b label) int { return cmp.Compare(a.from.Y, b.from.Y) })
	wanted := make([]vg.Length, len(labels))
	for i, l := range labels {
		wanted[i] = l.from.Y
	}
	for i, y := range spread(wanted, labelStep, f.Min.Y, f.Max.Y) {
		l := labels[i]
		at := vg.Point{X: f.Max.X + 22, Y: y}
		f.StrokeLine2(draw.LineStyle{Color: dim, Width: 0.4}, l.from.X, l.from.Y, f.Max.X+4, y)
		f.StrokeLine2(l.style, f.Max.X+5, y, at.X-3, y)
		style := writing(labelSize, l.style.Color)
		f.FillText(style, at, shorten(style, l.words, room-24))
	}
}

// spread moves ascending places apart to a step, each as little as can be, within bounds
// where there is room.
func spread(wanted []vg.Length, step, from, to vg.Length) []vg.Length {
	type group struct {
		first, n int
		sum      vg.Length // of wanted places less the offsets within the group
	}
	var groups []group
	place := func(g group) vg.Length {
		low := g.sum / vg.Length(g.n)
		return max(from, min(low, to-step*vg.Length(g.n-1)))
	}
	for i, y := range wanted {
		groups = append(groups, group{i, 1, y})
		for len(groups) > 1 {
			a, b := groups[len(groups)-2], groups[len(groups)-1]
			if place(b) >= place(a)+step*vg.Length(a.n) {
				break
			}
			a.sum += b.sum - step*vg.Length(a.n*b.n)
			a.n += b.n
			groups = append(groups[:len(groups)-2], a)
		}
	}
	out := make([]vg.Length, len(wanted))
	for _, g := range groups {
		for k := range g.n {
			out[g.first+k] = place(g) + step*vg.Length(k)
		}
	}
	return out
}
