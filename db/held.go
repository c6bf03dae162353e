package db

import (
	"context"
	"database/sql"
	"encoding/json"
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
// files where it is "". Records, events, stations and files are shared by components and
// read once. What is computed is read of all components alone: a file's few would cost
// as much, and nobody asks for it.
func (s *Snapshot) selectComponents(ctx context.Context, details Details, sha256 string) ([]HeldComponent, error) {
	condition := ""
	var args []any
	if sha256 != "" {
		condition = ` WHERE x.source_id = (SELECT id FROM ` + s.shown("source_file") + ` WHERE sha256 = ?)`
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
	beside, err := s.besideComponents(ctx, details)
	if err != nil {
		return nil, err
	}
	var v componentRow
	w := wanted{name: "component", condition: condition, args: args}
	w.columns, w.into = v.columns(details)
	out := make([]HeldComponent, 0, s.seals[sealKey{name: "component"}].rows)
	versions := false
	err = s.scan(ctx, w, func() (err error) {
		versions = versions || v.motion.Valid
		v.Record = records[v.RecordID]
		f := files[v.SourceID]
		v.SourcePath, v.SourceSHA256, v.SourceFormat = f.path, f.sha256, f.format
		beside.describe(&v.HeldComponent)
		if v.Start, err = parseTime(v.start); err != nil {
			return err
		}
		v.Warnings = nil
		if v.warnings != "" {
			if err := json.Unmarshal([]byte(v.warnings), &v.Warnings); err != nil {
				return err
			}
		}
		out = append(out, v.HeldComponent)
		return nil
	})
	if err != nil {
		return nil, err
	}
	s.hasVersions = &versions
	return out, nil
}

// componentRow is a component as SQL gives it.
type componentRow struct {
	HeldComponent
	start, warnings string
	motion          sql.NullInt64
}

func orNaN(x sql.NullFloat64) float64 {
	if !x.Valid {
		return math.NaN()
	}
	return x.Float64
}

// columns are what is read of a component, and where it goes.
func (v *componentRow) columns(d Details) (names []string, into []any) {
	names, into = words(`id record_id role motion_id`), []any{&v.ID, &v.RecordID, &v.Role, &v.motion}
	if d&DetailMotion != 0 {
		names = append(names, words(`axis azimuth_deg step_s samples start_at`)...)
		into = append(into, &v.Axis, &v.AzimuthDeg, &v.StepS, &v.Samples, &v.start)
	}
	if d&DetailBand != 0 {
		names = append(names, words(`step_s low_cut_hz high_cut_hz`)...)
		into = append(into, &v.StepS, &v.LowCutHz, &v.HighCutHz)
	}
	if d&DetailChannel != 0 {
		names = append(names, words(`label rank channel samples unit processing low_cut_hz high_cut_hz header_peak_m_s2 warnings source_id source_line`)...)
		into = append(into, &v.Label, &v.Rank, &v.Channel, &v.Samples, &v.Unit, &v.Processing,
			&v.LowCutHz, &v.HighCutHz, &v.HeaderPeak, &v.warnings, &v.SourceID, &v.SourceLine)
	}
	return names, into
}

// sourceFile is what is read of a file with its components.
type sourceFile struct{ path, sha256, format string }

// files reads the files, by id, of the components that meet the condition.
func (s *Snapshot) files(ctx context.Context, condition string, args []any) (map[int64]sourceFile, error) {
	if condition != "" {
		condition = ` WHERE sha256 = ?`
	}
	var id int64
	var v sourceFile
	out := map[int64]sourceFile{}
	err := s.scan(ctx, wanted{
		name: "source_file", columns: words(`id path sha256 format`), into: []any{&id, &v.path, &v.sha256, &v.format}, condition: condition, args: args,
	}, func() error {
		out[id] = v
		return nil
	})
	return out, err
}

// records reads the records, by id, of the components that meet the condition.
func (s *Snapshot) records(ctx context.Context, d Details, condition string, args []any) (map[int64]*Record, error) {
	where := func(id string) string {
		if condition == "" {
			return ""
		}
		return ` WHERE id IN (SELECT ` + id + ` FROM ` + s.shown("record") + ` r JOIN ` + s.shown("component") + ` x ON x.record_id = r.id` + condition + `)`
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
	w := wanted{name: "record", condition: where("r.id"), args: args}
	w.columns, w.into = v.columns(d)
	out := map[int64]*Record{}
	err = s.scan(ctx, w, func() (err error) {
		r := v.Record
		r.EventID, r.StationID = v.event.Int64, v.station.Int64
		r.Event, r.Station = events[r.EventID], stations[r.StationID]
		r.Start, err = parseTime(v.start)
		out[v.id] = &r
		return err
	})
	return out, err
}

// recordRow is a record as SQL gives it.
type recordRow struct {
	Record
	id             int64
	event, station sql.NullInt64
	start          string
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
