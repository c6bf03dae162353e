package query

import (
	"cmp"
	"context"
	"slices"
	"time"

	"swaybook/db"
)

// measuresRow is a row of the table of measures, of the columns that MeasuresQuestion gives.
type measuresRow struct {
	Record            string   `parquet:"record,dict"`
	Component         string   `parquet:"component,dict"`
	PGA               *float64 `parquet:"pga_g" unit:"g"`
	PGV               *float64 `parquet:"pgv_m_s" unit:"m/s"`
	PGD               *float64 `parquet:"pgd_m" unit:"m"`
	Arias             *float64 `parquet:"arias_m_s" unit:"m/s"`
	CAV               *float64 `parquet:"cav_m_s" unit:"m/s"`
	StandardisedCAV   *float64 `parquet:"cav_standardised_m_s" unit:"m/s"`
	Significant575    *float64 `parquet:"d5_75_s" unit:"s"`
	Significant595    *float64 `parquet:"d5_95_s" unit:"s"`
	Bracketed         *float64 `parquet:"bracketed_s" unit:"s"`
	RMS               *float64 `parquet:"rms_m_s2" unit:"m/s²"`
	MeanPeriod        *float64 `parquet:"mean_period_s" unit:"s"`
	SpectrumIntensity *float64 `parquet:"spectrum_intensity_m" unit:"m"`
}

func measuresRowOf(m *motion) measuresRow {
	a, row := m.attributes(), measuresRow{Record: m.record(), Component: m.role}
	into := []**float64{
		&row.PGA, &row.PGV, &row.PGD, &row.Arias, &row.CAV, &row.StandardisedCAV, &row.Significant575, &row.Significant595,
		&row.Bracketed, &row.RMS, &row.MeanPeriod, &row.SpectrumIntensity,
	}
	for i, x := range measuresOf(&a) {
		*into[i] = knownOrNull(*x)
	}
	return row
}

// eventRow is a row of the table of events, of columns that RecordRow has too.
type eventRow struct {
	Event         string     `parquet:"event"`
	Name          *string    `parquet:"event_name"`
	Origin        *time.Time `parquet:"origin,timestamp(microsecond)"`
	Magnitude     *float64   `parquet:"magnitude"`
	MagnitudeType *string    `parquet:"magnitude_type,dict"`
	DepthKM       *float64   `parquet:"depth_km" unit:"km"`
	Latitude      *float64   `parquet:"event_latitude" unit:"deg"`
	Longitude     *float64   `parquet:"event_longitude" unit:"deg"`
}

func eventRowOf(e **db.Event) eventRow {
	v := *e
	return eventRow{
		Event: v.Code, Name: orNull(v.Name), Origin: timeOrNull(v.Origin), Magnitude: v.Magnitude, MagnitudeType: orNull(v.MagnitudeType),
		DepthKM: v.DepthKM, Latitude: v.LatitudeDeg, Longitude: v.LongitudeDeg,
	}
}

// eventsOf are the known events of motions, each once, by code. Of several that stand for one
// earthquake it is the one whose code all have, or the first.
func eventsOf(motions []motion) []*db.Event {
	byCode := map[string]*db.Event{}
	stands := func(e *db.Event) bool { return e.OwnCode == e.Code }
	for i := range motions {
		e := motions[i].members[0].Record.Event
		if e == nil || e.Code == "" {
			continue
		}
		was := byCode[e.Code]
		if was == nil || stands(e) && !stands(was) || stands(e) == stands(was) && e.OwnCode < was.OwnCode {
			byCode[e.Code] = e
		}
	}
	events := make([]*db.Event, 0, len(byCode))
	for _, e := range byCode {
		events = append(events, e)
	}
	slices.SortFunc(events, func(a, b *db.Event) int { return cmp.Compare(a.Code, b.Code) })
	return events
}

// writeTables writes what is no ordinate.
func (d *dataset) writeTables(ctx context.Context, motions []motion) (err error) {
	byMotion := []string{"record", "component"}
	if d.summary.Measures, err = writeTable(ctx, d, tableMeasures, byMotion, motions, measuresRowOf); err != nil {
		return err
	}
	if d.summary.Records, err = writeTable(ctx, d, tableRecords, byMotion, motions, rowOf); err != nil {
		return err
	}
	d.summary.Events, err = writeTable(ctx, d, tableEvents, []string{"event"}, eventsOf(motions), eventRowOf)
	return err
}
