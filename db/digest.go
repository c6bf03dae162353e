package db

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"hash"
	"maps"
	"regexp"
	"slices"
	"strings"
	"time"
)

// digestVersion is raised whenever the canonical text of a state changes.
const digestVersion = 2

// Digest returns the digest of what the store at path has published, as version and
// SHA-256, of a text that names everything by what it is: it depends neither on ids, nor on
// the order in which files were read, nor on how many runs it took, nor on where the files
// lay. So codes of records are not in it, which may count versions in the order of reading,
// nor paths, nor who rejected what. The error is ErrEmpty or ErrUnpublished where there is
// nothing published.
func Digest(ctx context.Context, path string) (digest string, err error) {
	err = Inspect(ctx, path, func(Fault) {}, func(i *Inspection) error {
		v, err := snapshotOf(ctx, i.tx, nothingShown, isPublished)
		if err == nil {
			digest, err = v.Digest(ctx)
		}
		return err
	})
	return digest, err
}

// Digest is the digest of what the snapshot shows, as of what is published the function Digest.
// What all results share is written first, then the records in the order of their digests. It
// is of the rows, whatever is laid out of them.
func (s *Snapshot) Digest(ctx context.Context) (string, error) {
	d := &digester{snapshot: s.ofRows(), records: map[int64]*digestedRecord{}}
	for _, read := range []func(context.Context) error{d.components, d.computed, d.measures, d.statements} {
		if err := read(ctx); err != nil {
			return "", fmt.Errorf("make digest: %w", err)
		}
	}
	g := &s.Generation
	sum := sha256.New()
	fmt.Fprintf(sum, "swaybook %d\nsolver %q\nrecipe %q %s\n", digestVersion, g.Solver, g.Recipe.Name, g.Recipe.Steps)
	fmt.Fprintf(sum, "periods %s\ndampings %s\n", exactList(g.Grid.PeriodsS), exactList(g.Grid.Dampings))
	var records []string
	for _, r := range d.records {
		records = append(records, r.digest(d))
	}
	slices.Sort(records)
	for _, r := range records {
		fmt.Fprintln(sum, r)
	}
	return fmt.Sprintf("%d %x", digestVersion, sum.Sum(nil)), nil
}

func exactList(values []float64) string {
	var out []string
	for i := range values {
		out = append(out, exact(&values[i]))
	}
	return strings.Join(out, " ")
}

// digester gathers what there is to say of each record.
type digester struct {
	snapshot *Snapshot
	records  map[int64]*digestedRecord
	stated   map[Subject][]string
}

type digestedRecord struct {
	id     int64
	record *Record
	roles  map[string]*digestedRole
}

// digestedRole is a component, a pair over all directions or both.
type digestedRole struct {
	description string // "" of a pair
	start       time.Time
	spectra     hash.Hash
	dampings    int
	failure     string
	measures    []byte // a list; there are many
}

func (d *digester) role(recordID int64, role string) *digestedRole {
	r, ok := d.records[recordID]
	if !ok {
		r = &digestedRecord{id: recordID, roles: map[string]*digestedRole{}}
		d.records[recordID] = r
	}
	if r.roles[role] == nil {
		r.roles[role] = &digestedRole{}
	}
	return r.roles[role]
}

func (d *digester) components(ctx context.Context) error {
	held, err := d.snapshot.Components(ctx, AllDetails)
	if err != nil {
		return err
	}
	samples, versions, err := d.samples(ctx, held)
	if err != nil {
		return err
	}
	for i := range held {
		c := &held[i]
		to := d.role(c.RecordID, c.Role)
		d.records[c.RecordID].record, to.start = c.Record, c.Start
		to.description = describe(c) + " " + samples[c.ID] + " versions" + strings.Join(versions[c.ID], "")
	}
	return nil
}

// samples returns the digests of the components' samples, and of those of which there are
// several versions these, each by what it was read from.
func (d *digester) samples(ctx context.Context, held []HeldComponent) (samples map[int64]string, versions map[int64][]string, err error) {
	rows, err := d.snapshot.tx.QueryContext(ctx, `SELECT c.id, coalesce(s.sha256, ''), coalesce(c.motion_id, 0) FROM `+d.snapshot.shown("component")+` c LEFT JOIN series s ON s.id = c.series_id`)
	if err != nil {
		return nil, nil, err
	}
	type row struct {
		id     int64
		digest string
		motion int64
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.id, &v.digest, &v.motion} })
	if err != nil {
		return nil, nil, err
	}
	origins := map[int64]string{}
	for i := range held {
		c := &held[i]
		origins[c.ID] = fmt.Sprintf(" %s:%d:%s:%q", c.SourceSHA256, c.SourceLine, c.Role, c.Channel)
	}
	samples, versions = map[int64]string{}, map[int64][]string{}
	of := map[int64][]string{}
	for _, v := range found {
		if samples[v.id] = v.digest; v.motion != 0 {
			of[v.motion] = append(of[v.motion], origins[v.id])
		}
	}
	for _, list := range of {
		slices.Sort(list)
	}
	for _, v := range found {
		versions[v.id] = of[v.motion]
	}
	return samples, versions, nil
}

// folders are what of paths in warnings depends on where files lay.
var folders = regexp.MustCompile(`[^\s"]*[/\\]`)

// describe is what questions show of a component.
func describe(c *HeldComponent) string {
	warnings := make([]string, len(c.Warnings))
	for i, w := range c.Warnings {
		warnings[i] = folders.ReplaceAllString(w, "")
	}
	slices.Sort(warnings)
	return fmt.Sprintf("%s %q %d azimuth %s channel %q start %s step %s samples %d unit %q %q corners %s %s peak %s warnings %q file %s %s line %d findings %s conditioned %s %s",
		c.Axis, c.Label, c.Rank, exact(c.AzimuthDeg), c.Channel, stamp(c.Start), exact(&c.StepS), c.Samples, c.Unit, c.Processing,
		exact(c.LowCutHz), exact(c.HighCutHz), exact(c.HeaderPeak), warnings, c.SourceSHA256, c.SourceFormat, c.SourceLine,
		findingsKey(c.Findings), c.Conditioning.key(), c.Conditioning.findingsKey())
}

func stamp(at time.Time) string {
	if at.IsZero() {
		return "-"
	}
	return at.UTC().Format(time.RFC3339Nano)
}

// computed reads the spectra as the bytes that they are stored as, which are one for each
// value, tile by tile.
func (d *digester) computed(ctx context.Context) error {
	rows, err := d.snapshot.tx.QueryContext(ctx, `SELECT k.record_id, k.role, k.computation_id, coalesce(x.failure, ''), `+placeOfSpectra+`
		FROM `+d.snapshot.shown("computed")+` k JOIN computation x ON x.id = k.computation_id`+besideComputed+` ORDER BY s.tile_id, s.place`)
	if err != nil {
		return err
	}
	type row struct {
		location
		role, failure string
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.record, &v.role, &v.computation, &v.failure, &v.tile, &v.place, &v.motions}
	})
	if err != nil {
		return err
	}
	grid := &d.snapshot.Generation.Grid
	tiles := &tileReader{q: d.snapshot.tx}
	for _, v := range found {
		var spectra []storedSpectrum
		if v.tile != 0 {
			if spectra, err = tiles.at(ctx, v.location, len(grid.Dampings), len(grid.PeriodsS)); err != nil {
				return err
			}
		}
		r := d.role(v.record, v.role)
		r.spectra, r.failure = sha256.New(), v.failure
		for _, s := range spectra {
			if len(s.sd) > 0 {
				r.dampings++
				fmt.Fprintf(r.spectra, "%d ", len(s.sd))
				r.spectra.Write(s.sd)
			}
		}
	}
	return nil
}

func (d *digester) measures(ctx context.Context) error {
	rows, err := d.snapshot.tx.QueryContext(ctx, `SELECT k.record_id, k.role, m.name, m.value FROM `+d.snapshot.shown("computed")+` k JOIN measure m ON m.computation_id = k.computation_id ORDER BY k.role, k.record_id, m.name`)
	if err != nil {
		return err
	}
	defer rows.Close()
	var id int64
	var role, name string
	var value float64
	for rows.Next() {
		if err := rows.Scan(&id, &role, &name, &value); err != nil {
			return err
		}
		r := d.role(id, role)
		if len(r.measures) > 0 {
			r.measures = append(r.measures, ", "...)
		}
		r.measures = append(append(append(r.measures, name...), ' '), exact(&value)...)
	}
	return rows.Err()
}

// statements reads who states what. Of several that state the same the store notes one, so
// that names no source.
func (d *digester) statements(ctx context.Context) error {
	rows, err := d.snapshot.tx.QueryContext(ctx, `SELECT subject, subject_id, attribute, stated_by, value FROM `+d.snapshot.shown("statement"))
	if err != nil {
		return err
	}
	found, err := collect(rows, func(v *Statement) []any { return []any{&v.Kind, &v.ID, &v.Attribute, &v.By, &v.Value} })
	d.stated = map[Subject][]string{}
	for _, v := range found {
		d.stated[v.Subject] = append(d.stated[v.Subject], fmt.Sprintf("%q by %s: %q", v.Attribute, v.By, v.Value))
	}
	for _, list := range d.stated {
		slices.Sort(list)
	}
	return err
}

// start is the record's, "" where it is that of one of its components: of which is a matter
// of the order in which they came.
func (r *digestedRecord) start() string {
	for _, role := range r.roles {
		if role.start.Equal(r.record.Start) {
			return ""
		}
	}
	return stamp(r.record.Start)
}

// digest is that of all that there is to say of the record.
func (r *digestedRecord) digest(d *digester) string {
	sum := sha256.New()
	line := func(format string, args ...any) { fmt.Fprintf(sum, format+"\n", args...) }
	stated := func(kind string, id int64) {
		line("stated %s", strings.Join(d.stated[Subject{Kind: kind, ID: id}], ", "))
	}
	if c := r.record; c != nil {
		x := &c.Distances
		line("record %q %s start %q distances %s %s %s %s %s", c.Instrument, c.Siting, r.start(),
			exact(x.BestKM), exact(x.EpicentralKM), exact(x.HypocentralKM), exact(x.RuptureKM), exact(x.JoynerBooreKM))
		stated(SubjectRecord, r.id)
		if e := c.Event; e != nil {
			line("event %q %q %q origin %s at %s %s depth %s magnitude %s %q", e.OwnCode, e.Code, e.Name, stamp(e.Origin),
				exact(e.LatitudeDeg), exact(e.LongitudeDeg), exact(e.DepthKM), exact(e.Magnitude), e.MagnitudeType)
			stated(SubjectEvent, c.EventID)
		}
		if s := c.Station; s != nil {
			line("station %q %q %q at %s %s elevation %s vs30 %s class %q", s.Network, s.Code, s.Name,
				exact(s.LatitudeDeg), exact(s.LongitudeDeg), exact(s.ElevationM), exact(s.Vs30MPS), s.SiteClass)
			stated(SubjectStation, c.StationID)
		}
	}
	for _, role := range slices.Sorted(maps.Keys(r.roles)) {
		v := r.roles[role]
		line("%s %s", role, v.description)
		if v.spectra == nil {
			line("not computed")
			continue
		}
		line("computed %q %d spectra %x measures %s", v.failure, v.dampings, v.spectra.Sum(nil), v.measures)
	}
	return hex.EncodeToString(sum.Sum(nil))
}
