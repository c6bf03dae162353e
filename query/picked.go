package query

import (
	"iter"
	"maps"
	"slices"
)

// leaveOut takes motions, by position, out of those that were picked, each for its
// reason. The error is an EmptyError where no motion is left.
func (p *picked) leaveOut(reasons map[int]string) error {
	if len(reasons) == 0 {
		return nil
	}
	type cause struct {
		record int64
		reason string
	}
	counted := map[cause]bool{}
	kept := make([]motion, 0, len(p.motions))
	for i, m := range p.motions {
		reason, isOut := reasons[i]
		if !isOut {
			kept = append(kept, m)
			continue
		}
		if c := (cause{m.members[0].RecordID, reason}); !counted[c] {
			counted[c] = true
			p.leftOut[reason]++
		}
	}
	p.motions = kept
	return p.finish()
}

// finish counts what the motions are of. The error is an EmptyError where there is
// none.
func (p *picked) finish() error {
	r := p.report
	r.motions = p.motions
	r.Spectra, r.Records, r.LeftOut, r.Notes = len(p.motions), 0, nil, nil
	for _, reason := range slices.Sorted(maps.Keys(p.leftOut)) {
		r.LeftOut = append(r.LeftOut, LeftOut{Reason: reason, Records: p.leftOut[reason]})
	}
	unknown, assumed := 0, 0 // records of unknown siting; with an assumed right angle
	events := map[string]bool{}
	for motions := range p.byRecord() {
		r.Records++
		if slices.ContainsFunc(motions, func(m motion) bool { return m.isAssumed() }) {
			assumed++
		}
		record := motions[0].members[0].Record
		if record.Siting == "unknown" {
			unknown++
		}
		if record.Event != nil {
			events[record.Event.Code] = true
		}
	}
	r.Events = len(events)
	if unknown > 0 && r.Siting != "unknown" {
		r.Notes = append(r.Notes, countOf(unknown, "record", "records")+" of unknown siting among them")
	}
	if assumed > 0 {
		r.Notes = append(r.Notes, countOf(assumed, "record", "records")+" of unknown azimuth among them, the horizontals taken at a right angle")
	}
	p.report = r
	if len(p.motions) == 0 {
		return &EmptyError{Held: p.held, Outside: p.outside, Unmet: p.unmet, LeftOut: r.LeftOut, Hint: p.hint}
	}
	return nil
}

// noteBand says what became of ordinates outside the usable band.
func (p *picked) noteBand(partly, coarse int) {
	switch {
	case p.ignoresBand:
		p.report.Notes = append(p.report.Notes, "usable bands ignored: ordinates count at periods that filters and sampling have emptied")
	case partly > 0:
		p.report.Notes = append(p.report.Notes, countOf(partly, "spectrum counts", "spectra count")+" at a part of the periods only: the usable band")
	}
	if coarse > 0 {
		p.report.Notes = append(p.report.Notes, countOf(coarse, "spectrum has", "spectra have")+" periods of fewer than ten steps, where it may be low: oversample by a recipe")
	}
}

// noteStandIns says that versions complete one another.
func (p *picked) noteStandIns(n int) {
	if n > 0 {
		p.report.Notes = append(p.report.Notes, countOf(n, "spectrum stands", "spectra stand")+" in for a better version at periods at which that cannot be believed")
	}
}

// byRecord yields the motions of one record after another.
func (p *picked) byRecord() iter.Seq[[]motion] {
	return runs(p.motions, func(m *motion) int64 { return m.members[0].RecordID })
}
