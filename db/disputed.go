package db

import (
	"context"
	"fmt"
)

// Disputed is an attribute of which several values are stated.
type Disputed struct {
	Kind       string // of subject
	Code       string // of the event, the station (after its network's) or the record
	Attribute  string
	Statements []Statement // that which is taken first
}

// AttributeCode is that of the codes of one earthquake: a statement of it is one
// code, that which is shown first.
const AttributeCode = "code"

// What stands for who states a code: association does, which shows the first.
const (
	firstCode = "first code"
	otherCode = "other code"
)

// Disputed returns the attributes of which several values are stated, by kind,
// code and attribute; and the earthquakes that have several codes, as such an
// attribute. What is stated of an event under any of its codes is one list.
func (s *Snapshot) Disputed(ctx context.Context) ([]Disputed, error) {
	if err := s.whole(ctx, "statement", "event", "station", "record"); err != nil {
		return nil, err
	}
	// By the id that is shown: of an event, of the one that stands for it.
	rows, err := s.tx.QueryContext(ctx, `WITH shown AS (
			SELECT t.subject, coalesce(e.primary_id, t.subject_id) AS id, t.attribute, t.stated_by, t.value, t.source
			FROM `+s.shown("statement")+` t LEFT JOIN `+s.shown("event")+` e ON t.subject = 'event' AND e.id = t.subject_id
			UNION ALL
			SELECT 'event', coalesce(primary_id, id), '`+AttributeCode+`', iif(primary_id IS NULL, '`+firstCode+`', '`+otherCode+`'), code, '' FROM `+s.shown("event")+`
		), several AS (
			SELECT subject, id, attribute FROM shown GROUP BY subject, id, attribute HAVING count(DISTINCT value) > 1
		)
		SELECT subject, id, attribute, stated_by, value, source,
			coalesce(CASE subject WHEN 'event' THEN (SELECT o.code FROM `+s.shown("event")+` o WHERE o.id = several.id)
				WHEN 'station' THEN (SELECT ltrim(o.network || '.' || o.code, '.') FROM `+s.shown("station")+` o WHERE o.id = several.id)
				ELSE (SELECT o.code FROM `+s.shown("record")+` o WHERE o.id = several.id) END, '') AS of
		FROM several JOIN shown USING (subject, id, attribute) ORDER BY subject, of, id, attribute`)
	if err != nil {
		return nil, fmt.Errorf("read statements: %w", err)
	}
	type row struct {
		Statement
		code string
	}
	found, err := collect(rows, func(v *row) []any {
		return []any{&v.Kind, &v.ID, &v.Attribute, &v.By, &v.Value, &v.Source, &v.code}
	})
	if err != nil {
		return nil, fmt.Errorf("read statements: %w", err)
	}
	var out []Disputed
	for i, v := range found {
		if i == 0 || v.Subject != found[i-1].Subject || v.Attribute != found[i-1].Attribute {
			out = append(out, Disputed{Kind: v.Kind, Code: v.code, Attribute: v.Attribute})
		}
		last := &out[len(out)-1]
		last.Statements = append(last.Statements, v.Statement)
	}
	for i := range out {
		SortStatements(out[i].Statements)
	}
	return out, nil
}

// ScaledVersions are two components that hold one motion, the samples of the second
// Scale times those of the first.
type ScaledVersions struct {
	Role                  string
	FirstCode, SecondCode string // of the records
	FirstPath, SecondPath string
	Scale                 float64
}

// ScaledVersions returns the versions of one motion of which one is more than a share
// larger than the other, by the records' codes. Polarity does not count.
func (s *Snapshot) ScaledVersions(ctx context.Context, share float64) ([]ScaledVersions, error) {
	if err := s.whole(ctx, "likeness", "component", "record", "source_file"); err != nil {
		return nil, err
	}
	rows, err := s.tx.QueryContext(ctx, `SELECT a.role, ra.code, rb.code, fa.path, fb.path, l.scale
		FROM `+s.shown("likeness")+` l
		JOIN `+s.shown("component")+` a ON a.id = l.first_id JOIN `+s.shown("component")+` b ON b.id = l.second_id AND b.motion_id = a.motion_id
		JOIN `+s.shown("record")+` ra ON ra.id = a.record_id JOIN `+s.shown("record")+` rb ON rb.id = b.record_id
		JOIN `+s.shown("source_file")+` fa ON fa.id = a.source_id JOIN `+s.shown("source_file")+` fb ON fb.id = b.source_id
		WHERE abs(l.scale) NOT BETWEEN 1 / (1 + ?1) AND 1 + ?1 ORDER BY ra.code, rb.code, a.role`, share)
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	found, err := collect(rows, func(v *ScaledVersions) []any {
		return []any{&v.Role, &v.FirstCode, &v.SecondCode, &v.FirstPath, &v.SecondPath, &v.Scale}
	})
	if err != nil {
		return nil, fmt.Errorf("read versions: %w", err)
	}
	return found, nil
}
