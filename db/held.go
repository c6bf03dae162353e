package db

import (
	"context"
	"database/sql"
	"encoding/json"
	"fmt"
	"math"
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
// files where it is "". Records, events and stations are shared by components and
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
	var n int
	if err := s.tx.QueryRowContext(ctx, `SELECT count(*) FROM `+s.shown("component")+` c`+condition, args...).Scan(&n); err != nil {
		return nil, fmt.Errorf("count components: %w", err)
	}
	var conditioned map[roleOf]*Conditioning
	if details&DetailBand != 0 {
		if conditioned, err = s.conditionings(ctx); err != nil {
			return nil, err
		}
	}
	var findings map[roleOf][]Finding
	if details&DetailFindings != 0 {
		if findings, err = s.findings(ctx); err != nil {
			return nil, err
		}
		if err := s.addConditionedFindings(ctx, conditioned); err != nil {
			return nil, err
		}
	}
	var measures map[roleOf]map[string]float64
	if details&DetailMeasures != 0 {
		if measures, err = s.measures(ctx); err != nil {
			return nil, err
		}
	}
	rows, err := s.tx.QueryContext(ctx, s.componentQuery(details)+condition+` ORDER BY r.code, c.role`, args...)
	if err != nil {
		return nil, fmt.Errorf("read components: %w", err)
	}
	defer rows.Close()
	var v componentRow
	_, into := v.columns(details)
	out := make([]HeldComponent, 0, n)
	for rows.Next() {
		v = componentRow{}
		if err := rows.Scan(into...); err != nil {
			return nil, fmt.Errorf("read components: %w", err)
		}
		v.Record = records[v.RecordID]
		v.Findings = findings[roleOf{v.RecordID, v.Role}]
		v.Conditioning, v.Measures = conditioned[roleOf{v.RecordID, v.Role}], measures[roleOf{v.RecordID, v.Role}]
		if v.Start, err = parseTime(v.start); err != nil {
			return nil, err
		}
		v.Peaks = Peaks{orNaN(v.pga), orNaN(v.pgv), orNaN(v.pgd)}
		if v.warnings != "" {
			if err := json.Unmarshal([]byte(v.warnings), &v.Warnings); err != nil {
				return nil, fmt.Errorf("read components: %w", err)
			}
		}
		out = append(out, v.HeldComponent)
	}
	return out, rows.Err()
}

// roleOf is a component of a record.
type roleOf struct {
	record int64
	role   string
}

// findingOf is a finding of a component.
type findingOf struct {
	roleOf
	Finding
}

// ofComputed joins what is computed in the generation to a table of it under the name x.
func (s *Snapshot) ofComputed(table string) string {
	return ` FROM ` + s.shown("computed") + ` k JOIN ` + table + ` x ON x.computation_id = k.computation_id`
}

// conditionings are those of the generation.
func (s *Snapshot) conditionings(ctx context.Context) (map[roleOf]*Conditioning, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, x.step_s, x.samples, x.lead_s, x.low_cut_hz, x.high_cut_hz, x.long_s`+s.ofComputed("conditioning"))
	if err != nil {
		return nil, fmt.Errorf("read conditioning: %w", err)
	}
	type row struct {
		roleOf
		Conditioning
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.record, &v.role, &v.StepS, &v.Samples, &v.LeadS, &v.LowCutHz, &v.HighCutHz, &v.LongS}
	})
	if err != nil {
		return nil, fmt.Errorf("read conditioning: %w", err)
	}
	out := make(map[roleOf]*Conditioning, len(found))
	for i := range found {
		out[found[i].roleOf] = &found[i].Conditioning
	}
	return out, nil
}

// findings are those of the components, in the order of flags.
func (s *Snapshot) findings(ctx context.Context) (map[roleOf][]Finding, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT c.record_id, c.role, f.flag, f.value, f.bound, f.words
		FROM `+s.shown("finding")+` f JOIN `+s.shown("component")+` c ON c.id = f.component_id ORDER BY f.component_id, f.flag`)
	if err != nil {
		return nil, fmt.Errorf("read findings: %w", err)
	}
	found, err := collect(rows, func(v *findingOf) []any { return []any{&v.record, &v.role, &v.Flag, &v.Value, &v.Bound, &v.Words} })
	if err != nil {
		return nil, fmt.Errorf("read findings: %w", err)
	}
	out := map[roleOf][]Finding{}
	for _, v := range found {
		out[v.roleOf] = append(out[v.roleOf], v.Finding)
	}
	return out, nil
}

// addConditionedFindings adds to the conditionings what was found in the motions that
// they left.
func (s *Snapshot) addConditionedFindings(ctx context.Context, to map[roleOf]*Conditioning) error {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, x.flag, x.value, x.bound, x.words`+s.ofComputed("conditioned_finding")+` ORDER BY k.record_id, k.role, x.flag`)
	if err != nil {
		return fmt.Errorf("read findings: %w", err)
	}
	found, err := collect(rows, func(v *findingOf) []any { return []any{&v.record, &v.role, &v.Flag, &v.Value, &v.Bound, &v.Words} })
	if err != nil {
		return fmt.Errorf("read findings: %w", err)
	}
	for _, v := range found {
		if k := to[v.roleOf]; k != nil {
			k.Findings = append(k.Findings, v.Finding)
		}
	}
	return nil
}

// Flag adds to components that were read without DetailFindings those findings that have
// one of these flags, the flag alone, and to their conditionings, where those were read,
// those of the conditioned motion: a question over thousands of components screens for a
// few flags, which few have.
func (s *Snapshot) Flag(ctx context.Context, components []HeldComponent, flags []string) error {
	delivered, left := map[roleOf][]Finding{}, map[roleOf][]Finding{}
	for _, flag := range flags {
		err := s.flag(ctx, delivered, flag, `SELECT c.record_id, c.role FROM `+s.shown("finding")+` f JOIN `+s.shown("component")+` c ON c.id = f.component_id WHERE f.flag = ?`, flag)
		if err == nil {
			err = s.flag(ctx, left, flag, `SELECT k.record_id, k.role FROM conditioned_finding f JOIN `+s.shown("computed")+` k ON k.computation_id = f.computation_id
				WHERE f.flag = ?`, flag)
		}
		if err != nil {
			return fmt.Errorf("read findings: %w", err)
		}
	}
	if len(delivered)+len(left) == 0 {
		return nil
	}
	for i := range components {
		c := &components[i]
		c.Findings = delivered[roleOf{c.RecordID, c.Role}]
		if c.Conditioning != nil {
			c.Conditioning.Findings = left[roleOf{c.RecordID, c.Role}]
		}
	}
	return nil
}

// flag adds the flag to the components that the query names.
func (s *Snapshot) flag(ctx context.Context, flagged map[roleOf][]Finding, flag, query string, args ...any) error {
	rows, err := s.tx.QueryContext(ctx, query, args...)
	if err != nil {
		return err
	}
	found, err := collect(rows, func(k *roleOf) []any { return []any{&k.record, &k.role} })
	for _, k := range found {
		flagged[k] = append(flagged[k], Finding{Flag: flag})
	}
	return err
}

// measures are those of the generation but for the peaks.
func (s *Snapshot) measures(ctx context.Context) (map[roleOf]map[string]float64, error) {
	rows, err := s.tx.QueryContext(ctx, `SELECT k.record_id, k.role, x.name, x.value`+s.ofComputed("measure")+
		` WHERE x.name NOT IN ('`+MeasurePGA+`', '`+MeasurePGV+`', '`+MeasurePGD+`')`)
	if err != nil {
		return nil, fmt.Errorf("read measures: %w", err)
	}
	type row struct {
		roleOf
		name  string
		value float64
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.record, &v.role, &v.name, &v.value} })
	if err != nil {
		return nil, fmt.Errorf("read measures: %w", err)
	}
	out := map[roleOf]map[string]float64{}
	for _, v := range found {
		m, ok := out[v.roleOf]
		if !ok {
			m = map[string]float64{}
			out[v.roleOf] = m
		}
		m[v.name] = v.value
	}
	return out, nil
}

// componentRow is a component as SQL gives it.
type componentRow struct {
	HeldComponent
	start, warnings string
	pga, pgv, pgd   sql.NullFloat64
}

func orNaN(x sql.NullFloat64) float64 {
	if !x.Valid {
		return math.NaN()
	}
	return x.Float64
}

// columns are what is read of a component, and where it goes. Without details
// these stand in indices, so that the tables need not be read.
func (v *componentRow) columns(d Details) (names string, into []any) {
	names, into = `c.record_id, c.role`, []any{&v.RecordID, &v.Role}
	if d&DetailMotion != 0 {
		names += `, c.axis, c.azimuth_deg, c.step_s, c.samples, coalesce(c.start_at, '')`
		into = append(into, &v.Axis, &v.AzimuthDeg, &v.StepS, &v.Samples, &v.start)
	}
	if d&DetailBand != 0 {
		names += `, c.step_s, c.low_cut_hz, c.high_cut_hz`
		into = append(into, &v.StepS, &v.LowCutHz, &v.HighCutHz)
	}
	if d&DetailPeaks != 0 {
		names += `, pga.value, pgv.value, pgd.value`
		into = append(into, &v.pga, &v.pgv, &v.pgd)
	}
	if d&DetailChannel != 0 {
		names += `, c.id, c.label, c.rank, c.channel, c.samples, c.unit, c.processing,
			c.low_cut_hz, c.high_cut_hz, c.header_peak_m_s2, c.warnings, c.source_id, c.source_line, f.path, f.sha256, f.format`
		into = append(into, &v.ID, &v.Label, &v.Rank, &v.Channel, &v.Samples, &v.Unit, &v.Processing,
			&v.LowCutHz, &v.HighCutHz, &v.HeaderPeak, &v.warnings, &v.SourceID, &v.SourceLine, &v.SourcePath, &v.SourceSHA256, &v.SourceFormat)
	}
	return names, into
}

// componentQuery is the query up to its condition, without parameters.
func (s *Snapshot) componentQuery(d Details) string {
	names, _ := new(componentRow).columns(d)
	text := `SELECT ` + names + ` FROM ` + s.shown("component") + ` c JOIN ` + s.shown("record") + ` r ON r.id = c.record_id`
	if d&DetailPeaks != 0 {
		text += ` LEFT JOIN ` + s.shown("computed") + ` k ON k.record_id = c.record_id AND k.role = c.role`
		for _, m := range [][2]string{{"pga", MeasurePGA}, {"pgv", MeasurePGV}, {"pgd", MeasurePGD}} {
			text += fmt.Sprintf(` LEFT JOIN measure %[1]s ON %[1]s.computation_id = k.computation_id AND %[1]s.name = '%[2]s'`, m[0], m[1])
		}
	}
	if d&DetailChannel != 0 {
		text += ` JOIN ` + s.shown("source_file") + ` f ON f.id = c.source_id`
	}
	return text
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
	rows, err := s.tx.QueryContext(ctx, `SELECT `+names+` FROM `+s.shown("record")+where("r.id"), args...)
	if err != nil {
		return nil, fmt.Errorf("read records: %w", err)
	}
	defer rows.Close()
	out := map[int64]*Record{}
	for rows.Next() {
		v = recordRow{}
		if err := rows.Scan(into...); err != nil {
			return nil, fmt.Errorf("read records: %w", err)
		}
		r := v.Record
		r.EventID, r.StationID = v.event.Int64, v.station.Int64
		r.Event, r.Station = events[r.EventID], stations[r.StationID]
		if r.Start, err = parseTime(v.start); err != nil {
			return nil, err
		}
		out[v.id] = &r
	}
	return out, rows.Err()
}

// recordRow is a record as SQL gives it.
type recordRow struct {
	Record
	id             int64
	event, station sql.NullInt64
	start          string
}

func (v *recordRow) columns(d Details) (names string, into []any) {
	names, into = `id, code, siting, event_id`, []any{&v.id, &v.Code, &v.Siting, &v.event}
	if d&DetailRecord != 0 {
		names += `, station_id, instrument, coalesce(start_at, ''), distance_km, epicentral_km, hypocentral_km, rupture_km, jb_km`
		d := &v.Distances
		into = append(into, &v.station, &v.Instrument, &v.start, &d.BestKM, &d.EpicentralKM, &d.HypocentralKM, &d.RuptureKM, &d.JoynerBooreKM)
	}
	return names, into
}
