package db

import (
	"context"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// partComputation is a computation as a shard has it.
type partComputation struct {
	id              int64
	inputs, failure string
	// of are the inputs of what a pair's computation was made of, empty of a component's.
	of        []string
	isDamaged bool
	computed  Spectra
}

// computationsComing are those of so many computations that the store may not have.
type computationsComing struct {
	looked int
	list   []partComputation
}

// computations takes over what was computed, in the order in which it was: what was computed
// of pairs comes behind what was of their components.
func (g *gathering) computations(ctx context.Context) error {
	defer g.part.tiles.forget() // which stays open until all parts are read
	return ahead(ctx, g.readComputations, func(batch computationsComing) error {
		return g.update(ctx, batch.looked, func(t *Tx) error {
			for i := range batch.list {
				if err := g.computation(ctx, t, &batch.list[i]); err != nil {
					return err
				}
			}
			return nil
		})
	})
}

func (g *gathering) readComputations(ctx context.Context, pass func(computationsComing) error) error {
	for last := int64(0); ; {
		rows, err := g.part.tx.QueryContext(ctx, `SELECT id, inputs, coalesce(failure, '') FROM computation WHERE generation_id = ? AND id > ? ORDER BY id LIMIT ?`,
			g.part.Generation.ID, last, gatherBatch)
		if err != nil {
			return g.part.unread(ctx, err)
		}
		found, err := collect(rows, func(c *partComputation) []any { return []any{&c.id, &c.inputs, &c.failure} })
		if err != nil || len(found) == 0 {
			return g.part.unread(ctx, err)
		}
		last = found[len(found)-1].id
		batch := computationsComing{looked: len(found)}
		for _, c := range found {
			if c.of, err = g.part.madeOf(ctx, c.inputs); err != nil {
				return g.part.unread(ctx, err)
			}
			held, err := heldComputation(ctx, g.store.read, g.generation, &c)
			if err != nil {
				return err
			}
			if held.id == 0 {
				batch.list = append(batch.list, c)
			}
		}
		if err := g.readComputed(ctx, batch.list); err != nil {
			return g.part.unread(ctx, err)
		}
		if err := pass(batch); err != nil {
			return err
		}
	}
}

// readComputed reads what was computed, of computations in the order of their numbers.
func (g *gathering) readComputed(ctx context.Context, list []partComputation) error {
	if len(list) == 0 {
		return nil
	}
	damaged, err := g.damagedIn(ctx, list[0].id, list[len(list)-1].id)
	for i := range list {
		c := &list[i]
		if c.isDamaged = damaged[c.id]; err != nil || c.isDamaged || c.failure != "" {
			continue
		}
		c.computed, err = g.part.spectra(ctx, c.id)
		c.isDamaged = len(c.computed.sd) != len(g.part.Generation.Grid.Dampings)
	}
	return err
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

// computation stores one, unless it is there.
func (g *gathering) computation(ctx context.Context, t *Tx, c *partComputation) error {
	held, err := heldComputation(ctx, t.tx, g.generation, c)
	if err != nil || held.id != 0 || held.inputs == "" {
		return err
	}
	if c.isDamaged {
		g.done.Damaged++
		return nil
	}
	id, err := t.insert(ctx, `INSERT INTO computation (generation_id, inputs, failure) VALUES (?, ?, ?)`, g.generation, held.inputs, textOrNull(c.failure))
	if err != nil {
		return err
	}
	g.done.Computations++
	if c.failure != "" {
		return t.sealComputation(ctx, id, Spectra{}, c.failure)
	}
	return t.addSpectra(ctx, id, g.generation, c.computed)
}

// madeOf are the inputs of the computations that a pair's inputs name.
func (p *Part) madeOf(ctx context.Context, inputs string) (of []string, err error) {
	_, ids, _ := pairOf(inputs)
	for _, id := range ids {
		var text string
		if err := p.tx.QueryRowContext(ctx, `SELECT coalesce((SELECT inputs FROM computation WHERE id = ?), '')`, id).Scan(&text); err != nil {
			return nil, err
		}
		of = append(of, text)
	}
	return of, nil
}

// pairOf takes a pair's inputs apart: the role, the numbers of its components' computations,
// and the rest. Of a component's inputs there are no numbers.
func pairOf(inputs string) (role string, ids []string, rest string) {
	parts := strings.SplitN(inputs, " ", 4)
	if len(parts) < 4 || parts[0] != RoleRotD50 && parts[0] != RoleRotD100 {
		return "", nil, inputs
	}
	return parts[0], parts[1:3], parts[3]
}

// heldComputation is what a store has of a shard's computation: its number, 0 for none, and
// its inputs there, which of a pair name the computations of its components, and are "" where
// one of these is not there.
func heldComputation(ctx context.Context, q queryer, generation int64, c *partComputation) (held partComputation, err error) {
	const byInputs = `SELECT id FROM computation WHERE generation_id = ? AND inputs = ?`
	role, _, rest := pairOf(c.inputs)
	if held.inputs = c.inputs; role != "" {
		held.inputs = role
		for _, of := range c.of {
			id, err := idOf(ctx, q, byInputs, generation, of)
			if err != nil || id == 0 {
				return partComputation{}, err
			}
			held.inputs += " " + strconv.FormatInt(id, 10)
		}
		held.inputs += " " + rest
	}
	held.id, err = idOf(ctx, q, byInputs, generation, held.inputs)
	return held, err
}

// spectra reads what was computed. Of spectra that are not what was stored the first, and all
// behind it, are left out.
func (p *Part) spectra(ctx context.Context, id int64) (s Spectra, err error) {
	s.sd, err = p.tiles.whole(ctx, id)
	if lost := slices.IndexFunc(s.sd, func(sd []byte) bool { return sd == nil }); lost >= 0 {
		s.sd = s.sd[:lost]
		return s, err
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
