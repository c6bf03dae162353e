package db

import (
	"context"
	"errors"
	"slices"
	"testing"
)

// pairStore holds a record with a pair and one without.
func pairStore(t *testing.T) (*Store, Generation) {
	t.Helper()
	s, g := filledStore(t)
	update(t, s, func(ctx context.Context, tx *Tx) error {
		return errors.Join(add(ctx, tx, g, "single", RoleH1, 4), add(ctx, tx, g, "R1", RoleH2, 2), add(ctx, tx, g, "R1", RoleV, 3), add(ctx, tx, g, "R1", RoleH1, 1.1))
	})
	return s, g
}

func unrotatedOf(t *testing.T, s *Store, g Generation) []Pair {
	t.Helper()
	out, err := s.Unrotated(t.Context(), g.ID)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// rotatedRows counts the rows of what was rotated.
func rotatedRows(t *testing.T, s *Store) (spectra, measures int) {
	t.Helper()
	err := s.read.QueryRowContext(t.Context(), `SELECT
		(SELECT count(*) FROM computed k JOIN spectrum s ON s.computation_id = k.computation_id WHERE k.role LIKE 'rotd%'),
		(SELECT count(*) FROM computed k JOIN measure m ON m.computation_id = k.computation_id WHERE k.role LIKE 'rotd%')`).
		Scan(&spectra, &measures)
	if err != nil {
		t.Fatal(err)
	}
	return spectra, measures
}

func putRotated(t *testing.T, s *Store, g Generation, recordID int64, base float64) {
	t.Helper()
	var sd [][]float64
	for range g.Grid.Dampings {
		sd = append(sd, []float64{base, base + 1, base + 2})
	}
	update(t, s, func(ctx context.Context, tx *Tx) error {
		computed := NewSpectra(sd, map[string]float64{MeasurePGA: base}, nil)
		return tx.AddRotated(ctx, recordID, g.ID, computed, computed)
	})
}

func TestUnrotatedPairs(t *testing.T) {
	s, g := pairStore(t)
	pairs := unrotatedOf(t, s, g)
	want := Pair{RecordID: 2, Code: "R1", First: PairComponent{4, 0.01, 100, 30, true, startsAt}, Second: PairComponent{2, 0.01, 100, 30, true, startsAt}}
	if len(pairs) != 1 || pairs[0] != want {
		t.Fatalf("unrotated = %+v, want %+v alone", pairs, want)
	}
	putRotated(t, s, g, 2, 8)
	if spectra, measures := rotatedRows(t, s); spectra != 2 || measures != 2 {
		t.Errorf("%d spectra and %d measures, want 2 and 2", spectra, measures)
	}
	err := s.View(t.Context(), func(v *Snapshot) error {
		return v.Spectra(t.Context(), RoleRotD50, 1, Span{0, 3}, func(record int64, sd []float64) error {
			if record != 2 || !slices.Equal(sd, []float64{8, 9, 10}) {
				t.Errorf("rotated SD of record %d = %v", record, sd)
			}
			return nil
		})
	})
	if err != nil {
		t.Error(err)
	}
	if pairs := unrotatedOf(t, s, g); len(pairs) != 0 {
		t.Errorf("unrotated = %+v after rotation", pairs)
	}
}

// What was rotated goes when a horizontal becomes another one, and only then.
func TestRotatedSpectraAreForgotten(t *testing.T) {
	tests := []struct {
		name  string
		f     func(ctx context.Context, tx *Tx) error
		stays bool
	}{
		{"roles change places", func(ctx context.Context, tx *Tx) error {
			return tx.SetRoles(ctx, 2, map[string]string{RoleH1: RoleH2, RoleH2: RoleH1})
		}, false},
		{"no role is renamed", func(ctx context.Context, tx *Tx) error { return tx.SetRoles(ctx, 2, map[string]string{}) }, true},
		{"another azimuth", func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(31)})
		}, false},
		{"an azimuth that is known no more", func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 2, Component{Axis: "horizontal"})
		}, false},
		{"the same azimuth", func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(30), Label: "new"})
		}, true},
		{"another corner", func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 4, Component{Axis: "horizontal", AzimuthDeg: number(30), LowCutHz: number(1)})
		}, false},
		{"another record", func(ctx context.Context, tx *Tx) error {
			return tx.DescribeComponent(ctx, 1, Component{Axis: "horizontal", AzimuthDeg: number(31)})
		}, true},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			s, g := pairStore(t)
			putRotated(t, s, g, 2, 7)
			update(t, s, test.f)
			spectra, measures := rotatedRows(t, s)
			if stays := spectra > 0 && measures > 0; stays != test.stays || !stays && spectra+measures > 0 {
				t.Errorf("%d spectra and %d measures, want them to stay: %v", spectra, measures, test.stays)
			}
			if lacking := len(unrotatedOf(t, s, g)) > 0; lacking == test.stays {
				t.Errorf("unrotated: %v", lacking)
			}
		})
	}
}

func TestIsUnrotated(t *testing.T) {
	s, g := pairStore(t)
	pair := unrotatedOf(t, s, g)[0]
	turned := pair
	turned.Second.AzimuthDeg = 90
	is := func(p Pair) (ok bool) {
		update(t, s, func(ctx context.Context, tx *Tx) (err error) {
			ok, err = tx.IsUnrotated(ctx, g.ID, p)
			return err
		})
		return ok
	}
	if !is(pair) || is(turned) || is(Pair{RecordID: 1}) {
		t.Errorf("unrotated: the pair %v, turned %v, a record without pair %v", is(pair), is(turned), is(Pair{RecordID: 1}))
	}
	putRotated(t, s, g, 2, 7)
	if is(pair) {
		t.Error("still unrotated after rotation")
	}
}

// The stored decimals restore the doubles: a pair reads as it was written.
func TestReadPairRestoresTheDoubles(t *testing.T) {
	s, g := pairStore(t)
	first, second, err := s.ReadPair(t.Context(), g, unrotatedOf(t, s, g)[0])
	if err != nil {
		t.Fatal(err)
	}
	for i, m := range []StoredMotion{first, second} {
		delivered, errMotion := m.DecodeMotion()
		sd, err := m.DecodeSD()
		if err := errors.Join(err, errMotion); err != nil {
			t.Fatal(err)
		}
		samples := delivered.Acceleration
		base := []float64{1.1, 2}[i]
		want := []float64{base, base + 1, base + 2, base + 10, base + 11, base + 12}
		if !slices.Equal(sd, want) || !slices.Equal(samples[:99], motion(100, 4, 1)[:99]) {
			t.Errorf("component %d: SD = %v, want %v; samples as stored: %v", i, sd, want, slices.Equal(samples[:99], motion(100, 4, 1)[:99]))
		}
	}
}

func TestDecodeNamesWhatIsDamaged(t *testing.T) {
	s, g := pairStore(t)
	for _, damage := range []string{
		`UPDATE component SET series_id = NULL WHERE id = 4`,
		`UPDATE spectrum SET place = 99 WHERE computation_id = (SELECT computation_id FROM computed WHERE record_id = 2 AND role = 'h2')`,
	} {
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(err)
		}
	}
	first, second, err := s.ReadPair(t.Context(), g, unrotatedOf(t, s, g)[0])
	if err != nil {
		t.Fatal(err)
	}
	var lost, cut int
	for _, m := range []StoredMotion{first, second} {
		if delivered, err := m.DecodeMotion(); errors.Is(err, ErrDamaged) && delivered.Acceleration == nil {
			lost++
		}
		if sd, err := m.DecodeSD(); errors.Is(err, ErrDamaged) && sd == nil {
			cut++
		}
	}
	if lost != 1 || cut != 1 {
		t.Errorf("%d components without samples, %d without SD, want 1 and 1", lost, cut)
	}
}
