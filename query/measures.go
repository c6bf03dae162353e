package query

import (
	"context"
	"fmt"
	"io"
	"slices"

	"swaybook/db"
)

// MeasuresQuestion asks for the scalar measures of what a store holds.
type MeasuresQuestion struct {
	Selection // component: ComponentAll, siting: SitingAll by default
}

// measuresHeader names the columns, each with its unit.
var measuresHeader = append([]string{"record", "component", "pga_g", "pgv_m_s", "pgd_m"}, intensities...)

// Write writes the measures as CSV, a row a component, ordered by record and component,
// numbers in the fewest digits that restore them, what is unknown as an empty cell. The
// peaks of a pair over all directions are its own, its other measures the geometric mean
// of those of its components, or the larger for rotd100. Nothing is written before the
// question is found right and the selection not empty; see SpectrumQuestion.Ask for the
// errors.
func (q MeasuresQuestion) Write(ctx context.Context, store *db.Store, w io.Writer) (*ExportSummary, error) {
	selection, err := q.ofEverything().withDefaults(ComponentAll, SitingAll, storedComponents)
	if err != nil {
		return nil, err
	}
	summary := &ExportSummary{}
	err = view(ctx, store, &selection, func(snapshot *db.Snapshot) error {
		picked, err := pick(ctx, snapshot, selection, db.DetailPeaks|db.DetailMeasures|db.DetailMotion)
		if err != nil {
			return err
		}
		summary.Selection = picked.report
		var l csvLine
		l.words(measuresHeader...)
		l.end()
		for i := range picked.motions {
			picked.motions[i].measures(&l)
		}
		if _, err := w.Write(l.text); err != nil {
			return fmt.Errorf("write measures: %w", err)
		}
		return nil
	})
	return summary, err
}

// measures writes the motion's row.
func (m *motion) measures(l *csvLine) {
	a := m.attributes()
	l.words(m.record(), m.role)
	for _, x := range measuresOf(&a) {
		l.number(*x)
	}
	l.end()
}

// measuresOf are the measures in the order of measuresHeader.
func measuresOf(a *attributes) []*float64 {
	return slices.Concat([]*float64{&a.PGA, &a.PGV, &a.PGD}, intensitiesOf(a))
}
