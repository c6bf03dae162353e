package db

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"strings"
)

// HeldComponent is a stored component with what is known of its record.
type HeldComponent struct {
	ID       int64
	RecordID int64
	Record   *Record
	Component
	Peaks // of the ground motion
	// Measures are the other measures of the conditioned motion, by name.
	Measures map[string]float64
	// Conditioning is what the generation's recipe did, nil where it left the component as
	// it was delivered.
	Conditioning *Conditioning
}

// Peaks are PGA in m/s², PGV in m/s and PGD in m, NaN where the store has lost one.
type Peaks struct{ PGA, PGV, PGD float64 }

// AreDamaged reports whether the store has lost one.
func (p Peaks) AreDamaged() bool { return math.IsNaN(p.PGA + p.PGV + p.PGD) }

var lostPeaks = Peaks{math.NaN(), math.NaN(), math.NaN()}

// Details says what is read of components beside what every selection needs:
// RecordID, Role, and of the record Code, Siting and Event. A question over
// thousands of components spends its time on what it asks for, column by column.
type Details uint

// What can be asked for.
const (
	DetailRecord   Details = 1 << iota // the rest of Record
	DetailMotion                       // Axis, AzimuthDeg, StepS, Samples and Start
	DetailPeaks                        // Peaks
	DetailBand                         // StepS, LowCutHz, HighCutHz and Conditioning
	DetailMeasures                     // Measures
	DetailFindings                     // Findings, with DetailBand those of Conditioning too
	DetailChannel                      // ID and the rest of Component, corners and the source file's description too
	AllDetails     = DetailRecord | DetailMotion | DetailPeaks | DetailBand | DetailMeasures | DetailFindings | DetailChannel
)

// Components returns every held component with these details, ordered by record
// code and role.
func (s *Snapshot) Components(ctx context.Context, details Details) ([]HeldComponent, error) {
	return s.selectComponents(ctx, details, "")
}

// ComponentsOf returns the components that the file with this digest gave, as the
// transaction sees them, without what was found in them or computed of them.
func (t *Tx) ComponentsOf(ctx context.Context, sha256 string) ([]HeldComponent, error) {
	s := Snapshot{tx: t.tx, shown: working(0)}
	return s.selectComponents(ctx, DetailRecord|DetailMotion|DetailChannel, sha256)
}

// selectComponents reads the components of the file with this digest, of all
// files where it is "". Records, events, stations and files are shared by components and
// read once. What is computed is read of all components alone: a file's few would cost
// as much, and nobody asks for it.
func (s *Snapshot) selectComponents(ctx context.Context, details Details, sha256 string) ([]HeldComponent, error) {
	condition := ""
	var args []any
	if sha256 != "" {
		condition = ` WHERE c.source_id = (SELECT id FROM ` + s.shown("source_file") + ` WHERE sha256 = ?)`
		args = append(args, sha256)
	}
	records, err := s.records(ctx, details, condition, args)
	if err != nil {
		return nil, err
	}
	var files map[int64]sourceFile
	if details&DetailChannel != 0 {
		if files, err = s.files(ctx, condition, args); err != nil {
			return nil, err
		}
	}
	var n int
	if err := s.tx.QueryRowContext(ctx, `SELECT count(*) FROM `+s.shown("component")+` c`+condition, args...).Scan(&n); err != nil {
		return nil, fmt.Errorf("count components: %w", err)
	}
	beside, err := s.besideComponents(ctx, details)
	if err != nil {
		return nil, err
	}
	rows, err := s.tx.QueryContext(ctx, s.componentQuery(details)+condition+` ORDER BY r.code, c.role`, args...)
	if err != nil {
		return nil, fmt.Errorf("read components: %w", err)
	}
	defer rows.Close()
	var v componentRow
	columns, into := v.columns(details)
	seen, peaks := s.tally("component", "", ofTable(columns)...), s.attribution(sealedPeaks, componentRole)
	out := make([]HeldComponent, 0, n)
	versions := false
	for rows.Next() {
		v = componentRow{}
		if err := rows.Scan(into...); err != nil {
			return nil, s.unread("component", err)
		}
		seen.add(into)
		versions = versions || v.motion.Valid
		of := roleOf{v.RecordID, v.Role}
		v.Record = records[v.RecordID]
		f := files[v.SourceID]
		v.SourcePath, v.SourceSHA256, v.SourceFormat = f.path, f.sha256, f.format
		v.Findings, v.Conditioning, v.Measures = beside.findings[v.ID], beside.conditioned[of], beside.measures[of]
		if details&DetailPeaks != 0 {
			v.Peaks = v.peaks(peaks)
		}
		if v.Start, err = parseTime(v.start); err != nil {
			return nil, s.unread("component", err)
		}
		if v.warnings != "" {
			if err := json.Unmarshal([]byte(v.warnings), &v.Warnings); err != nil {
				return nil, s.unread("component", err)
			}
		}
		out = append(out, v.HeldComponent)
	}
	err = errors.Join(rows.Err(), seen.check())
	if err == nil && details&DetailPeaks != 0 {
		err = peaks.check()
	}
	if err != nil {
		return nil, s.unread("component", err)
	}
	s.hasVersions = &versions
	return out, nil
}

// componentRow is a component as SQL gives it.
type componentRow struct {
	HeldComponent
	start, warnings string
	motion          sql.NullInt64
	computation     sql.NullInt64
	pga, pgv, pgd   sql.NullFloat64
}

// peaks are the component's, NaN for one that is not there.
func (v *componentRow) peaks(seen *attribution) Peaks {
	of := roleOf{v.RecordID, v.Role}
	for _, m := range []struct {
		name  string
		value *sql.NullFloat64
	}{{MeasurePGA, &v.pga}, {MeasurePGV, &v.pgv}, {MeasurePGD, &v.pgd}} {
		if m.value.Valid {
			seen.measure(of, v.computation.Int64, m.name, m.value.Float64)
		}
	}
	return Peaks{orNaN(v.pga), orNaN(v.pgv), orNaN(v.pgd)}
}

func orNaN(x sql.NullFloat64) float64 {
	if !x.Valid {
		return math.NaN()
	}
	return x.Float64
}

// columns are what is read of a component, as SQL says it, and where it goes.
func (v *componentRow) columns(d Details) (names []string, into []any) {
	names, into = words(`c.id c.record_id c.role c.motion_id`), []any{&v.ID, &v.RecordID, &v.Role, &v.motion}
	if d&DetailMotion != 0 {
		names = append(names, words(`c.axis c.azimuth_deg c.step_s c.samples coalesce(c.start_at,'')`)...)
		into = append(into, &v.Axis, &v.AzimuthDeg, &v.StepS, &v.Samples, &v.start)
	}
	if d&DetailBand != 0 {
		names = append(names, words(`c.step_s c.low_cut_hz c.high_cut_hz`)...)
		into = append(into, &v.StepS, &v.LowCutHz, &v.HighCutHz)
	}
	if d&DetailPeaks != 0 {
		names = append(names, words(`k.computation_id pga.value pgv.value pgd.value`)...)
		into = append(into, &v.computation, &v.pga, &v.pgv, &v.pgd)
	}
	if d&DetailChannel != 0 {
		names = append(names, words(`c.label c.rank c.channel c.samples c.unit c.processing c.low_cut_hz c.high_cut_hz c.header_peak_m_s2 c.warnings c.source_id c.source_line`)...)
		into = append(into, &v.Label, &v.Rank, &v.Channel, &v.Samples, &v.Unit, &v.Processing,
			&v.LowCutHz, &v.HighCutHz, &v.HeaderPeak, &v.warnings, &v.SourceID, &v.SourceLine)
	}
	return names, into
}

// ofTable are the columns of the table itself among those of a query, "" for others.
func ofTable(columns []string) []string {
	out := make([]string, len(columns))
	for i, text := range columns {
		text = strings.TrimSuffix(strings.TrimPrefix(text, "coalesce("), ",'')")
		if name, ok := strings.CutPrefix(text, "c."); ok {
			out[i] = name
		}
	}
	return out
}

// componentQuery is the query up to its condition, without parameters.
func (s *Snapshot) componentQuery(d Details) string {
	names, _ := new(componentRow).columns(d)
	text := `SELECT ` + strings.Join(names, ", ") + ` FROM ` + s.shown("component") + ` c JOIN ` + s.shown("record") + ` r ON r.id = c.record_id`
	if d&DetailPeaks != 0 {
		text += ` LEFT JOIN ` + s.shown("computed") + ` k ON k.record_id = c.record_id AND k.role = c.role`
		for _, m := range [][2]string{{"pga", MeasurePGA}, {"pgv", MeasurePGV}, {"pgd", MeasurePGD}} {
			text += fmt.Sprintf(` LEFT JOIN measure %[1]s ON %[1]s.computation_id = k.computation_id AND %[1]s.name = '%[2]s'`, m[0], m[1])
		}
	}
	return text
}

// sourceFile is what is read of a file with its components.
type sourceFile struct{ path, sha256, format string }

// files reads the files, by id, of the components that meet the condition.
func (s *Snapshot) files(ctx context.Context, condition string, args []any) (map[int64]sourceFile, error) {
	if condition != "" {
		condition = ` WHERE sha256 = ?`
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT id, path, sha256, format FROM `+s.shown("source_file")+condition, args...)
	if err != nil {
		return nil, fmt.Errorf("read files: %w", err)
	}
	type row struct {
		id int64
		sourceFile
	}
	seen := s.tally("source_file", "", "id", "path", "sha256", "format")
	found, err := collectSeen(rows, seen, func(v *row) []any { return []any{&v.id, &v.path, &v.sha256, &v.format} })
	if err != nil {
		return nil, s.unread("source_file", err)
	}
	out := make(map[int64]sourceFile, len(found))
	for _, v := range found {
		out[v.id] = v.sourceFile
	}
	return out, nil
}

// records reads the records, by id, of the components that meet the condition.
func (s *Snapshot) records(ctx context.Context, d Details, condition string, args []any) (map[int64]*Record, error) {
	where := func(id string) string {
		if condition == "" {
			return ""
		}
		return ` WHERE id IN (SELECT ` + id + ` FROM ` + s.shown("record") + ` r JOIN ` + s.shown("component") + ` c ON c.record_id = r.id` + condition + `)`
	}
	events, err := s.events(ctx, where("r.event_id"), args)
	if err != nil {
		return nil, err
	}
	var stations map[int64]*Station
	if d&DetailRecord != 0 {
		if stations, err = s.stations(ctx, where("r.station_id"), args); err != nil {
			return nil, err
		}
	}
	var v recordRow
	names, into := v.columns(d)
	rows, err := s.tx.QueryContext(ctx, `SELECT `+strings.Join(names, ", ")+` FROM `+s.shown("record")+where("r.id"), args...)
	if err != nil {
		return nil, fmt.Errorf("read records: %w", err)
	}
	defer rows.Close()
	out := map[int64]*Record{}
	seen := s.tally("record", "", names...)
	for rows.Next() {
		v = recordRow{}
		if err := rows.Scan(into...); err != nil {
			return nil, s.unread("record", err)
		}
		seen.add(into)
		r := v.Record
		r.EventID, r.StationID = v.event.Int64, v.station.Int64
		r.Event, r.Station = events[r.EventID], stations[r.StationID]
		if r.Start, err = parseTime(v.start.String); err != nil {
			return nil, s.unread("record", err)
		}
		out[v.id] = &r
	}
	return out, s.unread("record", errors.Join(rows.Err(), seen.check()))
}

// recordRow is a record as SQL gives it.
type recordRow struct {
	Record
	id             int64
	event, station sql.NullInt64
	start          sql.NullString
}

func (v *recordRow) columns(d Details) (names []string, into []any) {
	names, into = words(`id code siting event_id`), []any{&v.id, &v.Code, &v.Siting, &v.event}
	if d&DetailRecord != 0 {
		names = append(names, words(`station_id instrument start_at distance_km epicentral_km hypocentral_km rupture_km jb_km`)...)
		d := &v.Distances
		into = append(into, &v.station, &v.Instrument, &v.start, &d.BestKM, &d.EpicentralKM, &d.HypocentralKM, &d.RuptureKM, &d.JoynerBooreKM)
	}
	return names, into
}
