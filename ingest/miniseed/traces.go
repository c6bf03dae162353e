package miniseed

import (
	"context"
	"errors"
	"fmt"
	"math"
	"time"
)

// SameRate reports whether two rates are the same but for what headers round:
// 0.01 %.
func SameRate(a, b float64) bool { return math.Abs(a-b) <= 1e-4*a }

// traces joins the records of one channel, which are in the order of time. The
// samples of a trace are allocated at once.
func traces(ctx context.Context, records []record) ([]Trace, error) {
	var out []Trace
	for len(records) > 0 {
		n := contiguous(records)
		t, err := join(ctx, records[:n])
		if err != nil {
			return nil, err
		}
		out = append(out, t)
		records = records[n:]
	}
	return out, nil
}

// contiguous returns how many of the records follow each other without a gap and
// without a change of rate.
func contiguous(records []record) int {
	first := &records[0]
	end := first.start + first.duration()
	for i := 1; i < len(records); i++ {
		r := &records[i]
		if !SameRate(first.rate, r.rate) || r.lateness(end) > 0.5 {
			return i
		}
		end = max(end, r.start+r.duration())
	}
	return len(records)
}

// lateness is how many samples after end, in ns, the record begins.
func (r *record) lateness(end int64) float64 { return float64(r.start-end) * 1e-9 * r.rate }

var errKinds = errors.New("samples change between integers and floating-point numbers")

// join decodes records into one trace, or gives up with the context.
func join(ctx context.Context, records []record) (Trace, error) {
	first := &records[0]
	t := Trace{
		Start: time.Unix(0, first.start).UTC(), Rate: first.rate, Encoding: first.encoding, Offset: first.offset,
	}
	total := 0
	for i := range records {
		total += records[i].count
	}
	t.Samples = make([]float64, 0, total)
	end := first.start
	for i := range records {
		if err := ctx.Err(); err != nil {
			return t, err
		}
		r := &records[i]
		if r.encoding.IsFloat() != first.encoding.IsFloat() {
			return t, &Error{r.offset, errKinds}
		}
		if err := t.append(r, end); err != nil {
			return t, &Error{r.offset, err}
		}
		end = max(end, r.start+r.duration())
	}
	return t, nil
}

// append decodes the record behind the samples, which reach up to end, and
// compares those that it has in common with them.
func (t *Trace) append(r *record, end int64) error {
	have := len(t.Samples)
	all := t.Samples[:have+r.count]
	flags, err := r.decode(all[have:])
	if err != nil {
		return err
	}
	t.Flags |= r.flags | flags
	early := int(math.Round(max(0, -r.lateness(end))))
	if late := r.lateness(end); late >= -0.5 {
		early = 0
		t.drift(r, have)
	}
	common := min(early, r.count)
	if early > have {
		return fmt.Errorf("begins %d samples before the first of its trace", early-have)
	}
	for i, v := range all[have : have+common] {
		if before := all[have-early+i]; math.Float64bits(before) != math.Float64bits(v) {
			return fmt.Errorf("overlaps with the records before it, and sample %d is %g there and %g here", i+1, before, v)
		}
	}
	copy(all[have:], all[have+common:])
	t.Samples = all[:len(all)-common]
	t.Repeated += common
	return nil
}

// drift notes how far a record's time is from that of sample i of the trace.
func (t *Trace) drift(r *record, i int) {
	off := time.Unix(0, r.start).Sub(t.At(i)).Seconds()
	t.DriftS = max(t.DriftS, math.Abs(off))
}
