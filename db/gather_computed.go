package db

import (
	"context"
	"fmt"
	"strconv"
	"strings"
)

// partComputation is a computation as a shard has it.
type partComputation struct {
	id              int64
	inputs, failure string
}

// computations takes over what was computed, in the order in which it was: what was computed
// of pairs comes behind what was of their components.
func (g *gathering) computations(ctx context.Context) error {
	for last := int64(0); ; {
		rows, err := g.part.tx.QueryContext(ctx, `SELECT id, inputs, coalesce(failure, '') FROM computation WHERE generation_id = ? AND id > ? ORDER BY id LIMIT ?`,
			g.part.Generation.ID, last, gatherBatch)
		if err != nil {
			return err
		}
		found, err := collect(rows, func(c *partComputation) []any { return []any{&c.id, &c.inputs, &c.failure} })
		if err != nil || len(found) == 0 {
			return err
		}
		last = found[len(found)-1].id
		damaged, err := g.damagedIn(ctx, found[0].id, last)
		if err != nil {
			return err
		}
		done := g.done
		err = g.update(ctx, len(found), func(t *Tx) error {
			g.done = done
			for _, c := range found {
				if err := g.computation(ctx, t, c, damaged[c.id]); err != nil {
					return err
				}
			}
			return nil
		})
		if err != nil {
			return err
		}
	}
}

// damagedIn returns which computations with numbers from first to last have measures and the
// like that are not what was stored.
func (g *gathering) damagedIn(ctx context.Context, first, last int64) (map[int64]bool, error) {
	rows, err := g.part.tx.QueryContext(ctx, `SELECT n.id FROM (`+sealsOfComputation+` WHERE x.id BETWEEN ? AND ?) n LEFT JOIN computation_seal s ON s.computation_id = n.id
		WHERE (s.`+strings.Join(computationSeals, ", s.")+`) IS NOT (n.`+strings.Join(computationSeals, ", n.")+`)`, first, last)
	if err != nil {
		return nil, err
	}
	found, err := collect(rows, func(id *int64) []any { return []any{id} })
	out := map[int64]bool{}
	for _, id := range found {
		out[id] = true
	}
	return out, err
}

// computation takes over one, unless it is there.
func (g *gathering) computation(ctx context.Context, t *Tx, c partComputation, isDamaged bool) error {
	inputs, err := g.inputs(ctx, t, c.inputs)
	if err != nil || inputs == "" {
		return err
	}
	held, err := t.idOf(ctx, `SELECT id FROM computation WHERE generation_id = ? AND inputs = ?`, g.generation, inputs)
	if err != nil || held != 0 {
		return err
	}
	var computed Spectra
	if !isDamaged && c.failure == "" {
		computed, err = g.part.spectra(ctx, c.id)
		if err != nil {
			return err
		}
		isDamaged = len(computed.sd) != len(g.part.Generation.Grid.Dampings)
	}
	if isDamaged {
		g.done.Damaged++
		return nil
	}
	id, err := t.insert(ctx, `INSERT INTO computation (generation_id, inputs, failure) VALUES (?, ?, ?)`, g.generation, inputs, textOrNull(c.failure))
	if err != nil {
		return err
	}
	g.done.Computations++
	if c.failure != "" {
		return t.sealComputation(ctx, id, Spectra{}, c.failure)
	}
	return t.addSpectra(ctx, id, computed)
}

// inputs are those that a computation has in the store that takes: a pair's name the
// computations of its components. They are "" where one of these did not come.
func (g *gathering) inputs(ctx context.Context, t *Tx, text string) (string, error) {
	role, rest, _ := strings.Cut(text, " ")
	if role != RoleRotD50 && role != RoleRotD100 {
		return text, nil
	}
	parts := strings.SplitN(rest, " ", 3)
	for i := range min(2, len(parts)) {
		var of string
		if err := g.part.tx.QueryRowContext(ctx, `SELECT coalesce((SELECT inputs FROM computation WHERE id = ?), '')`, parts[i]).Scan(&of); err != nil {
			return "", err
		}
		id, err := t.idOf(ctx, `SELECT id FROM computation WHERE generation_id = ? AND inputs = ?`, g.generation, of)
		if err != nil || id == 0 {
			return "", err
		}
		parts[i] = strconv.FormatInt(id, 10)
	}
	return role + " " + strings.Join(parts, " "), nil
}

// spectra reads what was computed. Of spectra that are not what was stored the first, and all
// behind it, are left out.
func (p *Part) spectra(ctx context.Context, id int64) (s Spectra, err error) {
	rows, err := p.tx.QueryContext(ctx, `SELECT sd_m, crc32c FROM spectrum WHERE id BETWEEN ? AND ? ORDER BY id`, mostDampings*id, mostDampings*id+mostDampings-1)
	if err != nil {
		return s, err
	}
	texts, err := collect(rows, func(t *sealedText) []any { return []any{&t.text, &t.seal} })
	for i := range texts {
		if texts[i].open() == nil {
			return s, err
		}
		s.sd = append(s.sd, texts[i].text)
	}
	if err == nil {
		s.measures, err = p.measures(ctx, id)
	}
	if err == nil {
		s.conditioning, err = p.conditioning(ctx, id)
	}
	if err != nil {
		return s, fmt.Errorf("read computation %d: %w", id, err)
	}
	return s, nil
}

func (p *Part) measures(ctx context.Context, id int64) (map[string]float64, error) {
	rows, err := p.tx.QueryContext(ctx, `SELECT name, value FROM measure WHERE computation_id = ?`, id)
	if err != nil {
		return nil, err
	}
	type row struct {
		name  string
		value float64
	}
	found, err := collect(rows, func(v *row) []any { return []any{&v.name, &v.value} })
	out := make(map[string]float64, len(found))
	for _, v := range found {
		out[v.name] = v.value
	}
	return out, err
}

func (p *Part) conditioning(ctx context.Context, id int64) (*Conditioning, error) {
	rows, err := p.tx.QueryContext(ctx, `SELECT step_s, samples, lead_s, low_cut_hz, high_cut_hz, long_s FROM conditioning WHERE computation_id = ?`, id)
	if err != nil {
		return nil, err
	}
	found, err := collect(rows, func(c *Conditioning) []any {
		return []any{&c.StepS, &c.Samples, &c.LeadS, &c.LowCutHz, &c.HighCutHz, &c.LongS}
	})
	if err != nil || len(found) == 0 {
		return nil, err
	}
	c := &found[0]
	if rows, err = p.tx.QueryContext(ctx, `SELECT flag, value, bound, words FROM conditioned_finding WHERE computation_id = ? ORDER BY flag`, id); err != nil {
		return nil, err
	}
	c.Findings, err = collect(rows, func(f *Finding) []any { return []any{&f.Flag, &f.Value, &f.Bound, &f.Words} })
	return c, err
}
