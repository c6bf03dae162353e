package chart

import (
	"fmt"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// No word of a selection is lost in any chart, as long as four lines have room for it.
func TestLongNotesAreWrapped(t *testing.T) {
	var words []string
	for i := range 60 {
		words = append(words, fmt.Sprintf("word%d", i))
	}
	note := strings.Join(words, " ")
	spectra, fourWay, exceedance, record, changes, points := invented(3), inventedFourWay(), inventedExceedance(), inventedRecord(100), inventedChanges(), inventedScatter(5)
	spectra.Notes, fourWay.Notes, exceedance.Notes, record.Notes, changes.Notes, points.Notes = []string{note}, []string{note}, []string{note}, []string{note}, []string{note}, []string{note}
	for _, c := range []Chart{spectra, fourWay, exceedance, record, changes, points} {
		text := strings.Join(strings.Fields(string(writtenPage(t, c))), " ")
		if !strings.Contains(text, note) || strings.Contains(text, "…") {
			t.Errorf("%T: the note is not written whole", c)
		}
	}
}

// What stands above a chart takes the room that its frame leaves.
func TestHeadingHasItsRoom(t *testing.T) {
	canvas := draw.NewCanvas(vgsvg.New(Half.Width, Half.Height), Half.Width, Half.Height)
	s := invented(3)
	for _, notes := range [][]string{nil, {"a"}, {strings.Repeat("many words ", 200), "b"}} {
		h := newHeading(canvas, s.Title, notes, s.Foot)
		f, _ := s.layout(canvas, &h)
		lowest := canvas.Max.Y - titleRoom - lineRoom*(vg.Length(len(h.lines))-0.5)
		if want := map[int]int{0: 0, 1: 1, 2: mostLines + 1}[len(notes)]; len(h.lines) != want || f.Max.Y > lowest {
			t.Errorf("%d notes take %d lines down to %v, the frame begins at %v", len(notes), len(h.lines), lowest, f.Max.Y)
		}
	}
}
