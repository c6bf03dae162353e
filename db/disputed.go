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
	// By the id that is shown: of an event, of the one that stands for it.
	rows, err := s.tx.QueryContext(ctx, `WITH shown AS (
			SELECT t.subject, coalesce(e.primary_id, t.subject_id) AS id, t.attribute, t.stated_by, t.value, t.source
			FROM statement t LEFT JOIN event e ON t.subject = 'event' AND e.id = t.subject_id
			UNION ALL
			SELECT 'event', coalesce(primary_id, id), '`+AttributeCode+`', iif(primary_id IS NULL, '`+firstCode+`', '`+otherCode+`'), code, '' FROM event
		), several AS (
			SELECT subject, id, attribute FROM shown GROUP BY subject, id, attribute HAVING count(DISTINCT value) > 1
		)
		SELECT subject, id, attribute, stated_by, value, source,
			coalesce(CASE subject WHEN 'event' THEN (SELECT code FROM event WHERE event.id = several.id)
				WHEN 'station' THEN (SELECT ltrim(network || '.' || code, '.') FROM station WHERE station.id = several.id)
				ELSE (SELECT code FROM record WHERE record.id = several.id) END, '') AS of
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
