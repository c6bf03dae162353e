package ingest

import (
	"cmp"
	"fmt"
	"slices"
)

// tornRows are the lines of rows that give one file different directions.
type tornRows struct{ first, second int }

// noteTorn keeps rows that give the file different directions, where neither it nor
// its name states one. They match it for all that.
func (c *Catalogue) noteTorn(rel string, rows [2]*catalogueRow) {
	if rows[0] == nil {
		return
	}
	for _, row := range rows {
		row.used.Store(true)
	}
	key := tornRows{min(rows[0].line, rows[1].line), max(rows[0].line, rows[1].line)}
	for {
		held, there := c.torn.LoadOrStore(key, rel)
		if !there || held.(string) <= rel || c.torn.CompareAndSwap(key, held, rel) {
			return
		}
	}
}

// Notes says in order of lines what of the catalogue was not used, and why.
func (c *Catalogue) Notes() []string {
	type note struct {
		line int
		text string
	}
	var notes []note
	for _, line := range c.nowhere {
		notes = append(notes, note{line, fmt.Sprintf("line %d: a position of 0, 0 is taken as unknown", line)})
	}
	c.torn.Range(func(key, rel any) bool {
		rows := key.(tornRows)
		notes = append(notes, note{rows.first, fmt.Sprintf("lines %d and %d give %s different directions, and it states none: of them only unit and dt_s are taken",
			rows.first, rows.second, rel)})
		return true
	})
	slices.SortFunc(notes, func(a, b note) int { return cmp.Or(cmp.Compare(a.line, b.line), cmp.Compare(a.text, b.text)) })
	texts := make([]string, len(notes))
	for i, n := range notes {
		texts[i] = n.text
	}
	return texts
}
