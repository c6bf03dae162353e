package db

import (
	"context"
	"fmt"
	"maps"
	"slices"
)

// Where the inputs of what is computed are said: of components and of pairs.
const (
	componentInputs = `SELECT inputs FROM component_inputs WHERE record_id = ?1 AND role = ?2`
	pairInputs      = `SELECT inputs FROM pair_inputs WHERE record_id = ?1 AND role = ?2 AND generation_id = ?3`
)

// AddSolved stores what was computed of a component.
func (t *Tx) AddSolved(ctx context.Context, u Unsolved, generationID int64, computed Spectra) error {
	return t.addComputed(ctx, componentInputs, u.RecordID, u.Role, generationID, computed)
}

// AddFailure stores why the generation's recipe cannot be carried out on a component,
// which is left without spectra.
func (t *Tx) AddFailure(ctx context.Context, u Unsolved, generationID int64, reason string) error {
	id, isNew, err := t.compute(ctx, componentInputs, u.RecordID, u.Role, generationID, reason)
	if err == nil && isNew {
		err = t.sealComputation(ctx, id, Spectra{}, reason)
	}
	if err != nil {
		return err
	}
	return t.setComputed(ctx, u.RecordID, u.Role, generationID, id)
}

// AddRotated stores what was computed of a record's horizontals over all directions, as far
// as that is not stored: see IsUnrotated.
func (t *Tx) AddRotated(ctx context.Context, recordID, generationID int64, rotd50, rotd100 Spectra) error {
	if err := t.addComputed(ctx, pairInputs, recordID, RoleRotD50, generationID, rotd50); err != nil {
		return err
	}
	return t.addComputed(ctx, pairInputs, recordID, RoleRotD100, generationID, rotd100)
}

// addComputed stores what was computed of a role of a record. Where it is stored, of equal
// inputs, that is the same, unless it was lost.
func (t *Tx) addComputed(ctx context.Context, inputs string, recordID int64, role string, generationID int64, computed Spectra) error {
	id, isNew, err := t.compute(ctx, inputs, recordID, role, generationID, "")
	if err == nil && !isNew {
		isNew, err = t.clearLost(ctx, id)
	}
	if err == nil && isNew {
		err = t.addSpectra(ctx, id, generationID, computed)
	}
	if err != nil {
		return err
	}
	return t.setComputed(ctx, recordID, role, generationID, id)
}

// clearLost removes what is left of a computation whose spectra are not there, and reports
// whether that was so.
func (t *Tx) clearLost(ctx context.Context, id int64) (isLost bool, err error) {
	found, err := t.idOf(ctx, `SELECT `+hasSpectra+` FROM (SELECT ? AS computation_id) k`, t.begun.id, id)
	if err != nil || found != 0 {
		return false, err
	}
	// Its tile stays until nobody asks for it: see dropTiles.
	for _, table := range []string{"spectrum", "conditioning", "conditioned_finding", "measure", "off_grid"} {
		if err := t.exec(ctx, `DELETE FROM `+table+` WHERE computation_id = ?`, id); err != nil {
			return false, fmt.Errorf("clear what was lost: %w", err)
		}
	}
	return true, nil
}

// compute returns the computation of these inputs, a new one where there is none.
func (t *Tx) compute(ctx context.Context, inputs string, recordID int64, role string, generationID int64, failure string) (id int64, isNew bool, err error) {
	id, err = t.idOf(ctx, `SELECT id FROM computation WHERE generation_id = ?3 AND inputs = (`+inputs+`)`, recordID, role, generationID)
	if err == nil && id == 0 {
		isNew = true
		id, err = t.insert(ctx, `INSERT INTO computation (generation_id, inputs, failure) VALUES (?3, (`+inputs+`), ?4)`, recordID, role, generationID, textOrNull(failure))
	}
	if err != nil {
		return 0, false, fmt.Errorf("store computation: %w", err)
	}
	return id, isNew, nil
}

func (t *Tx) setComputed(ctx context.Context, recordID int64, role string, generationID, computationID int64) error {
	err := t.exec(ctx, `INSERT OR REPLACE INTO computed (record_id, role, generation_id, computation_id) VALUES (?, ?, ?, ?)`, recordID, role, generationID, computationID)
	if err != nil {
		return fmt.Errorf("store computation: %w", err)
	}
	return nil
}

func (t *Tx) addSpectra(ctx context.Context, computationID, generationID int64, computed Spectra) error {
	if err := t.placeSpectra(ctx, computationID, generationID, computed.sd); err != nil {
		return err
	}
	if c := computed.conditioning; c != nil {
		err := t.exec(ctx, `INSERT INTO conditioning (computation_id, step_s, samples, lead_s, low_cut_hz, high_cut_hz, long_s)
			VALUES (?, ?, ?, ?, ?, ?, ?)`, computationID, c.StepS, c.Samples, c.LeadS, c.LowCutHz, c.HighCutHz, c.LongS)
		if err != nil {
			return fmt.Errorf("store conditioning: %w", err)
		}
		for _, f := range c.Findings {
			err := t.exec(ctx, `INSERT INTO conditioned_finding (computation_id, flag, value, bound, words) VALUES (?, ?, ?, ?, ?)`,
				computationID, f.Flag, f.Value, f.Bound, f.Words)
			if err != nil {
				return fmt.Errorf("store finding: %w", err)
			}
		}
	}
	for _, name := range slices.Sorted(maps.Keys(computed.measures)) {
		err := t.exec(ctx, `INSERT INTO measure (computation_id, name, value) VALUES (?, ?, ?)`, computationID, name, computed.measures[name])
		if err != nil {
			return fmt.Errorf("store measure %s: %w", name, err)
		}
	}
	return t.sealComputation(ctx, computationID, computed, "")
}

// Adopt gives components and pairs of the generation that lack it what was computed of
// equal inputs before, and reports whether there was any.
func (t *Tx) Adopt(ctx context.Context, generationID int64) (found bool, err error) {
	for _, missing := range []string{
		`SELECT i.record_id, i.role, x.generation_id, x.id FROM component_inputs i JOIN computation x ON x.generation_id = ?1 AND x.inputs = i.inputs
			WHERE NOT EXISTS (SELECT 1 FROM computed k WHERE k.record_id = i.record_id AND k.role = i.role AND k.generation_id = ?1)`,
		`SELECT i.record_id, i.role, x.generation_id, x.id FROM pair_inputs i JOIN computation x ON x.generation_id = i.generation_id AND x.inputs = i.inputs
			WHERE i.generation_id = ?1 AND NOT EXISTS (SELECT 1 FROM computed k WHERE k.record_id = i.record_id AND k.role = i.role AND k.generation_id = ?1)`,
	} {
		r, err := t.tx.ExecContext(ctx, `INSERT INTO computed (record_id, role, generation_id, computation_id) `+missing, generationID)
		if err != nil {
			return false, fmt.Errorf("find what was computed: %w", err)
		}
		n, err := r.RowsAffected()
		if err != nil {
			return false, fmt.Errorf("find what was computed: %w", err)
		}
		found = found || n > 0
	}
	return found, nil
}

// forgetOutdated takes from a component, and from the pair that it belongs to, what was
// computed of other inputs than theirs are now, in every generation.
func (t *Tx) forgetOutdated(ctx context.Context, componentID int64) error {
	for _, outdated := range []string{
		`SELECT k.record_id, k.role, k.generation_id FROM component_inputs i JOIN computed k ON k.record_id = i.record_id AND k.role = i.role
			JOIN computation x ON x.id = k.computation_id WHERE i.component_id = ?1 AND x.inputs <> i.inputs`,
		`SELECT k.record_id, k.role, k.generation_id FROM component c JOIN computed k ON k.record_id = c.record_id AND k.role IN ('` + RoleRotD50 + `', '` + RoleRotD100 + `')
			JOIN computation x ON x.id = k.computation_id
			LEFT JOIN pair_inputs i ON i.record_id = k.record_id AND i.role = k.role AND i.generation_id = k.generation_id
			WHERE c.id = ?1 AND x.inputs IS NOT i.inputs`,
	} {
		if err := t.exec(ctx, `DELETE FROM computed WHERE (record_id, role, generation_id) IN (`+outdated+`)`, componentID); err != nil {
			return fmt.Errorf("forget what was computed: %w", err)
		}
	}
	return nil
}

// forgetRotated takes from records what was computed of their horizontals, which are no
// longer those that they were.
func (t *Tx) forgetRotated(ctx context.Context, records ...int64) error {
	for _, id := range records {
		if err := t.exec(ctx, `DELETE FROM computed WHERE record_id = ? AND role IN ('`+RoleRotD50+`', '`+RoleRotD100+`')`, id); err != nil {
			return fmt.Errorf("forget what was rotated: %w", err)
		}
	}
	return nil
}
