package query

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"maps"
	"strconv"

	"swaybook/db"
)

// ExportQuestion asks for the ordinates of stored components and of what is
// stored of pairs over all directions, one row an ordinate.
type ExportQuestion struct {
	Selection           // component: ComponentAll, siting: SitingAll by default
	Dampings  []float64 // ratios; nil: those of the grid. Others are computed from samples.
	Band      Band      // grid periods taken
}

// ExportSummary says what was written.
type ExportSummary struct {
	Selection SelectionReport
	Rows      int
}

// exportHeader names the columns: damping is a ratio, g is 9.80665 m/s².
const exportHeader = "record,component,damping,period_s,sd_m,psv_m_s,psa_g\n"

// exportMemory is about how many bytes of ordinates are held at a time. Records come in the
// order of their codes, so that most tiles of the store may have some of each part: it should
// not be small; the default grid makes it 3300 components.
const exportMemory = 32 << 20

// exportGroup is the number of components whose rows are formatted side by
// side, about 100 kB each on the default grid, before they are written.
const exportGroup = 16

// Write writes the ordinates as CSV, ordered by record, component, damping and
// period, numbers in the fewest digits that restore them. The memory for
// ordinates does not grow with the store; what is known of each component,
// about 1 kB, is held. Nothing is written before the question is found right
// and the selection not empty; see SpectrumQuestion.Ask for the errors.
func (q ExportQuestion) Write(ctx context.Context, store *db.Store, w io.Writer) (*ExportSummary, error) {
	q, err := q.withDefaults()
	if err != nil {
		return nil, err
	}
	var summary *ExportSummary
	err = view(ctx, store, &q.Selection, func(snapshot *db.Snapshot) error {
		summary, err = q.write(ctx, snapshot, w)
		return err
	})
	return summary, err
}

func (q ExportQuestion) withDefaults() (ExportQuestion, error) {
	var err error
	if q.Selection, err = q.ofEverything().withDefaults(ComponentAll, SitingAll, storedComponents); err != nil {
		return q, err
	}
	if err := checkOscillators(nil, q.Dampings); err != nil {
		return q, err
	}
	return q, q.Band.validate()
}

func (q ExportQuestion) write(ctx context.Context, snapshot *db.Snapshot, w io.Writer) (*ExportSummary, error) {
	periods, err := gridPeriods(snapshot, q.Band)
	if err != nil {
		return nil, err
	}
	picked, err := pick(ctx, snapshot, q.Selection, db.DetailMotion)
	if err != nil {
		return nil, err
	}
	e := newExporter(snapshot, q.dampings(snapshot), periods)
	unfit, err := e.writeAll(ctx, w, picked.motions)
	if err != nil {
		return nil, err
	}
	err = picked.leaveOut(unfit)
	return &ExportSummary{Selection: picked.report, Rows: len(picked.motions) * len(e.dampings) * len(periods)}, err
}

func (q ExportQuestion) dampings(snapshot *db.Snapshot) []float64 {
	if len(q.Dampings) > 0 {
		return ascending(q.Dampings)
	}
	return ascending(snapshot.Generation.Grid.Dampings)
}

type exporter struct {
	snapshot *db.Snapshot
	dampings []float64
	periods  []float64
	omegas   []float64
	// keys are the cells ",damping,period," of every row of a component.
	keys   []string
	memory int
}

func newExporter(snapshot *db.Snapshot, dampings, periods []float64) *exporter {
	e := &exporter{snapshot: snapshot, dampings: dampings, periods: periods, memory: exportMemory}
	for _, t := range periods {
		e.omegas = append(e.omegas, omega(t))
	}
	for _, zeta := range dampings {
		for _, t := range periods {
			key := strconv.AppendFloat([]byte{','}, zeta, 'g', -1, 64)
			key = strconv.AppendFloat(append(key, ','), t, 'g', -1, 64)
			e.keys = append(e.keys, string(append(key, ',')))
		}
	}
	return e
}

func (e *exporter) partSize() int { return max(exportGroup, e.memory/(8*len(e.keys))) }

// writeAll returns the positions of the motions that it could not write, and why.
func (e *exporter) writeAll(ctx context.Context, w io.Writer, motions []motion) (unfit map[int]string, err error) {
	out := bufio.NewWriterSize(w, 1<<16)
	if _, err := out.WriteString(exportHeader); err != nil {
		return nil, fmt.Errorf("write ordinates: %w", err)
	}
	unfit = map[int]string{}
	for from := 0; from < len(motions); from += e.partSize() {
		part := motions[from:min(from+e.partSize(), len(motions))]
		left, err := e.writePart(ctx, out, part)
		if err != nil {
			return nil, err
		}
		for i, reason := range left {
			unfit[from+i] = reason
		}
	}
	if err := out.Flush(); err != nil {
		return nil, fmt.Errorf("write ordinates: %w", err)
	}
	return unfit, nil
}

func (e *exporter) writePart(ctx context.Context, out *bufio.Writer, part []motion) (unfit map[int]string, err error) {
	loaded := make([]*ordinates, len(e.dampings))
	unfit = map[int]string{}
	for i, zeta := range e.dampings {
		s := source{snapshot: e.snapshot}
		var left map[int]string
		if loaded[i], left, err = s.loadMotions(ctx, part, dampedBy(zeta, e.periods)); err != nil {
			return nil, err
		}
		maps.Copy(unfit, left)
	}
	return unfit, e.writeRows(ctx, out, part, loaded, unfit)
}

// writeRows writes the rows of a part, but for those of the unfit.
func (e *exporter) writeRows(ctx context.Context, out *bufio.Writer, part []motion, loaded []*ordinates, unfit map[int]string) error {
	texts := make([][]byte, exportGroup)
	for from := 0; from < len(part); from += exportGroup {
		group := part[from:min(from+exportGroup, len(part))]
		err := inParallel(ctx, len(group), func(_ context.Context, i int) error {
			texts[i] = texts[i][:0]
			if _, isOut := unfit[from+i]; !isOut {
				texts[i] = e.appendRows(texts[i], loaded, &group[i], from+i)
			}
			return nil
		})
		if err != nil {
			return err
		}
		for i := range group {
			if _, err := out.Write(texts[i]); err != nil {
				return fmt.Errorf("write ordinates: %w", err)
			}
		}
	}
	return nil
}

// appendRows writes all rows of the component at this position of the part.
func (e *exporter) appendRows(dst []byte, loaded []*ordinates, m *motion, position int) []byte {
	head := csvText(nil, m.record())
	head = csvText(append(head, ','), m.role)
	for i := range e.dampings {
		for p, w := range e.omegas {
			sd := loaded[i].at(p)[position]
			dst = append(append(dst, head...), e.keys[i*len(e.periods)+p]...)
			dst = strconv.AppendFloat(dst, sd, 'g', -1, 64)
			dst = strconv.AppendFloat(append(dst, ','), MeasurePSV.of(sd, w), 'g', -1, 64)
			dst = strconv.AppendFloat(append(dst, ','), MeasurePSA.of(sd, w), 'g', -1, 64)
			dst = append(dst, '\n')
		}
	}
	return dst
}
