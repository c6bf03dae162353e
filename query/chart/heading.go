package chart

import (
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// heading is what stands above a chart, in the lines that it takes, and below it.
type heading struct {
	title string
	lines []string
	foot  string
}

// The room of a title, from the top, of a line below it, and of what stands below the chart.
const (
	titleMiddle vg.Length = 11
	titleRoom   vg.Length = 24
	lineRoom    vg.Length = 10
	footRoom    vg.Length = 14
)

// newHeading breaks the notes into lines that a canvas has room for.
func newHeading(c draw.Canvas, title string, notes []string, foot string) heading {
	h := heading{title: title, foot: foot}
	for _, note := range notes {
		h.lines = append(h.lines, wrap(writing(labelSize, quiet), note, c.Size().X-leftRoom-8, mostLines)...)
	}
	return h
}

// mostLines is how many lines a note may take.
const mostLines = 4

// room is the height that title and notes take.
func (h *heading) room() vg.Length { return titleRoom + lineRoom*vg.Length(len(h.lines)) }

// write writes what stands above and below a chart.
func (h *heading) write(c draw.Canvas) {
	at := vg.Point{X: c.Min.X + leftRoom, Y: c.Max.Y - titleMiddle}
	c.FillText(bold(titleSize, ink), at, shorten(bold(titleSize, ink), h.title, c.Size().X-leftRoom-6))
	at.Y = c.Max.Y - titleRoom
	for _, line := range h.lines {
		c.FillText(writing(labelSize, quiet), at, line)
		at.Y -= lineRoom
	}
	style := writing(noteSize, quiet)
	at.Y = c.Min.Y + footRoom/2
	c.FillText(style, at, shorten(style, h.foot, c.Size().X-leftRoom-4))
}
