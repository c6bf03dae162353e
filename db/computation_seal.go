package db

import (
	"context"
	"fmt"
)

// A computation's seals are sums of checksums of its rows, kind by kind, 0 where there are
// none. That of a row has the computation's number, so that none can pass for another's.

// peakNames are the measures that are read as Peaks.
const peakNames = `('` + MeasurePGA + `', '` + MeasurePGV + `', '` + MeasurePGD + `')`

func isPeak(name string) bool { return name == MeasurePGA || name == MeasurePGV || name == MeasurePGD }

// sealsOfComputation is the query that tells the seals of computations by what is stored of
// them, in the order of computationSeals.
const sealsOfComputation = `SELECT x.id,
	(SELECT coalesce(sum(crc32c(computation_id, name, value)), 0) FROM measure WHERE computation_id = x.id AND name IN ` + peakNames + `) AS peaks,
	(SELECT coalesce(sum(crc32c(computation_id, name, value)), 0) FROM measure WHERE computation_id = x.id AND name NOT IN ` + peakNames + `) AS measures,
	(SELECT coalesce(sum(crc32c(computation_id, step_s, samples, lead_s, low_cut_hz, high_cut_hz, long_s)), 0) FROM conditioning WHERE computation_id = x.id) AS conditioning,
	(SELECT coalesce(sum(crc32c(computation_id, flag, value, bound, words)), 0) FROM conditioned_finding WHERE computation_id = x.id) AS findings,
	iif(x.failure IS NULL, 0, crc32c(x.id, x.failure)) AS failure FROM computation x`

// sealedIn are the tables of the kinds.
var sealedIn = map[string]string{sealedPeaks: "measure", sealedMeasures: "measure", sealedConditioning: "conditioning",
	sealedFindings: "conditioned_finding", sealedFailure: "computation"}

func (b *sealer) measure(computationID int64, name string, value float64) int64 {
	return b.row(computationID, name, value)
}

func (b *sealer) conditioning(computationID int64, k *Conditioning) int64 {
	return b.row(computationID, k.StepS, int64(k.Samples), k.LeadS, &k.LowCutHz, &k.HighCutHz, &k.LongS)
}

func (b *sealer) finding(computationID int64, f *Finding) int64 {
	return b.row(computationID, f.Flag, f.Value, f.Bound, f.Words)
}

// sealComputation notes what is stored of a computation.
func (t *Tx) sealComputation(ctx context.Context, id int64, computed Spectra, failure string) error {
	var b sealer
	var peaks, measures, conditioning, findings, failed int64
	for name, value := range computed.measures {
		if isPeak(name) {
			peaks += b.measure(id, name, value)
		} else {
			measures += b.measure(id, name, value)
		}
	}
	if k := computed.conditioning; k != nil {
		conditioning = b.conditioning(id, k)
		for i := range k.Findings {
			findings += b.finding(id, &k.Findings[i])
		}
	}
	if failure != "" {
		failed = b.row(id, failure)
	}
	err := t.exec(ctx, `INSERT OR REPLACE INTO computation_seal (computation_id, peaks, measures, conditioning, findings, failure) VALUES (?, ?, ?, ?, ?, ?)`,
		id, peaks, measures, conditioning, findings, failed)
	if err != nil {
		return fmt.Errorf("seal computation: %w", err)
	}
	return nil
}

// attribution adds up what is read of one kind of what computations have, against the seals
// of the edition: of all roles that are wanted, since a row that is lost is in none.
type attribution struct {
	sealer
	edition  int64
	kind     string
	want, is editionSeal
	of       roleOf
	seal     int64
}

// attribution is nil where the snapshot has no seals, and finds everything right.
func (s *Snapshot) attribution(kind string, wants func(role string) bool) *attribution {
	if s.seals == nil {
		return nil
	}
	a := &attribution{edition: s.Edition.ID, kind: kind, want: editionSeal{sums: []int64{0}}, is: editionSeal{sums: []int64{0}}}
	for key, seal := range s.seals {
		if key.name == kind && wants(key.part) && len(seal.sums) == 1 {
			a.want.rows += seal.rows
			a.want.sums[0] += seal.sums[0]
		}
	}
	return a
}

func anyRole(string) bool { return true }

func componentRole(role string) bool { return role != RoleRotD50 && role != RoleRotD100 }

// next goes over to a record's role: rows of one computation come together.
func (a *attribution) next(of roleOf) {
	if of == a.of {
		return
	}
	if a.seal != 0 {
		a.is.rows++
		a.is.sums[0] += a.row(a.of.record, a.of.role, a.seal)
	}
	a.of, a.seal = of, 0
}

func (a *attribution) measure(of roleOf, computationID int64, name string, value float64) {
	if a != nil {
		a.next(of)
		a.seal += a.sealer.measure(computationID, name, value)
	}
}

func (a *attribution) conditioning(of roleOf, computationID int64, k *Conditioning) {
	if a != nil {
		a.next(of)
		a.seal += a.sealer.conditioning(computationID, k)
	}
}

func (a *attribution) finding(of roleOf, computationID int64, f *Finding) {
	if a != nil {
		a.next(of)
		a.seal += a.sealer.finding(computationID, f)
	}
}

func (a *attribution) failure(of roleOf, computationID int64, text string) {
	if a != nil {
		a.next(of)
		a.seal += a.row(computationID, text)
	}
}

// check says whether all was read as it was stored.
func (a *attribution) check() error {
	if a == nil {
		return nil
	}
	a.next(roleOf{})
	if text := (sealKey{name: a.kind}).differs(a.want, a.is, nil); text != "" {
		return damage(a.edition, a.kind+" of computations", text)
	}
	return nil
}
