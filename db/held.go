package db

import (
	"database/sql"
	"encoding/json"
	"fmt"
)

// componentQuery reads components with the details asked for.
type componentQuery struct {
	details  Details
	events   map[int64]*Event
	stations map[int64]*Station
}

// componentRow is a component as SQL gives it.
type componentRow struct {
	HeldComponent
	record          Record
	event, station  sql.NullInt64
	start, warnings string
}

// columns are what is read of a component, and where it goes.
func (q *componentQuery) columns(v *componentRow) (names string, into []any) {
	names = `c.id, c.record_id, c.role, c.azimuth_deg, c.step_s, c.samples, r.code, r.siting, r.event_id`
	into = []any{&v.ID, &v.RecordID, &v.Role, &v.AzimuthDeg, &v.StepS, &v.Samples, &v.record.Code, &v.record.Siting, &v.event}
	if q.details&DetailRecord != 0 {
		names += `, r.station_id, r.instrument, coalesce(r.start_at, ''), r.distance_km`
		into = append(into, &v.station, &v.record.Instrument, &v.start, &v.record.DistanceKM)
	}
	if q.details&DetailPeaks != 0 {
		names += `, pga.value, pgv.value, pgd.value`
		into = append(into, &v.PGA, &v.PGV, &v.PGD)
	}
	if q.details&DetailChannel != 0 {
		names += `, c.axis, c.label, c.rank, c.channel, c.unit, c.processing, c.low_cut_hz, c.high_cut_hz,
			c.header_peak_m_s2, c.warnings, c.source_id, c.source_line, f.path, f.sha256, f.format`
		into = append(into, &v.Axis, &v.Label, &v.Rank, &v.Channel, &v.Unit, &v.Processing, &v.LowCutHz, &v.HighCutHz,
			&v.HeaderPeak, &v.warnings, &v.SourceID, &v.SourceLine, &v.SourcePath, &v.SourceSHA256, &v.SourceFormat)
	}
	return names, into
}

// text is the query up to its condition, without parameters.
func (q *componentQuery) text(generation int64) string {
	names, _ := q.columns(&componentRow{})
	text := `SELECT ` + names + ` FROM component c JOIN record r ON r.id = c.record_id `
	if q.details&DetailPeaks != 0 {
		for _, m := range [][2]string{{"pga", MeasurePGA}, {"pgv", MeasurePGV}, {"pgd", MeasurePGD}} {
			text += fmt.Sprintf(`LEFT JOIN measure %[1]s ON %[1]s.record_id = r.id AND %[1]s.role = c.role
				AND %[1]s.generation_id = %[3]d AND %[1]s.name = '%[2]s' `, m[0], m[1], generation)
		}
	}
	if q.details&DetailChannel != 0 {
		text += `JOIN source_file f ON f.id = c.source_id `
	}
	return text
}

// collect reads about n rows. Components of one record share it.
func (q *componentQuery) collect(rows *sql.Rows, n int) ([]HeldComponent, error) {
	defer rows.Close()
	var v componentRow
	_, into := q.columns(&v)
	out := make([]HeldComponent, 0, n)
	var record *Record
	for rows.Next() {
		v = componentRow{}
		if err := rows.Scan(into...); err != nil {
			return nil, err
		}
		if len(out) == 0 || out[len(out)-1].RecordID != v.RecordID {
			var err error
			if record, err = q.record(&v); err != nil {
				return nil, err
			}
		}
		v.Record = record
		if v.warnings != "" {
			if err := json.Unmarshal([]byte(v.warnings), &v.Warnings); err != nil {
				return nil, err
			}
		}
		out = append(out, v.HeldComponent)
	}
	return out, rows.Err()
}

func (q *componentQuery) record(v *componentRow) (*Record, error) {
	r := v.record
	r.Event, r.Station = q.events[v.event.Int64], q.stations[v.station.Int64]
	var err error
	r.Start, err = parseTime(v.start)
	return &r, err
}
