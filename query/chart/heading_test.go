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
		s.Notes = notes
		h, f, _ := s.layout(canvas)
		lowest := canvas.Max.Y - titleRoom - lineRoom*(vg.Length(len(h.lines))-0.5)
		if want := map[int]int{0: 0, 1: 1, 2: mostLines + 1}[len(notes)]; len(h.lines) != want || f.Max.Y > lowest {
			t.Errorf("%d notes take %d lines down to %v, the frame begins at %v", len(notes), len(h.lines), lowest, f.Max.Y)
		}
	}
}

// A mark that has no part on the axis is named in a note, by the page about a record too.
func TestMarksOutside(t *testing.T) {
	s, r := invented(3), inventedRecord(100) // of 0.01 to 10 s
	s.Notes, r.Notes = nil, nil
	s.Marks = []Mark{{"T = 30 s", 30, 30}, {"T = 1 s", 1, 1}, {"T = 0.001 to 0.005 s", 0.001, 0.005}, {"T = 5 to 20 s", 5, 20}}
	r.Spectra.Marks = s.Marks
	for _, c := range []Chart{s, r} {
		if words := string(writtenPage(t, c)); !strings.Contains(words, "<desc>not marked, as nothing is drawn there: T = 30 s, T = 0.001 to 0.005 s\n") {
			t.Errorf("%T does not say which marks are outside", c)
		}
	}
	s.IsLinear, s.Marks = true, s.Marks[1:]
	if words := string(written(t, SVG, s)); strings.Contains(words, "not marked") { // a linear axis begins at zero
		t.Error("marks on the axis are said to be outside")
	}
}
