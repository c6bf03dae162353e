package db

import (
	"fmt"
	"slices"
	"testing"
)

// Whoever has spectra in a part that is damaged is named, with its damping and periods, and nobody
// else; what lacks spectra too.
func TestDamagedTilesAreNamed(t *testing.T) {
	var first []string
	for i := range TileMotions {
		first = append(first, fmt.Sprintf("R%04d h%d", 1+i/2, 1+i%2))
	}
	second := partID(1, 1, 1)
	const text = "damping 2, periods 9 to 16: not what was stored; questions leave it out"
	for damage, want := range map[string]struct {
		text string
		of   []string
	}{
		fmt.Sprintf(`UPDATE tile_part SET crc32c = crc32c + 1 WHERE id = %d`, second): {text, first},
		fmt.Sprintf(`DELETE FROM tile_part WHERE id = %d`, second):                    {text, first},
		fmt.Sprintf(`DELETE FROM tile_part WHERE id IN (%d, %d)`, second, second+1):   {"damping 2, periods 9 to 19: not what was stored; questions leave it out", first},
		fmt.Sprintf(`UPDATE tile_part SET (sd_m, crc32c) = (SELECT d, crc32c(d) FROM (SELECT CAST(substr(sd_m, 1, 8 * 64) || x'ffffffffffffffff' || substr(sd_m, 8 * 65 + 1) AS BLOB) AS d)) WHERE id = %d`, second): {
			"damping 2, period 10: not what was stored; questions leave it out", first[1:2]},
		`DELETE FROM spectrum WHERE computation_id = 2`: {"has no spectra", first[1:2]},
	} {
		s, _ := tiledStore(t, 40)
		if _, err := s.write.ExecContext(t.Context(), damage); err != nil {
			t.Fatal(err)
		}
		var of []string
		err := Inspect(t.Context(), s.Path(), func(f Fault) {
			if of = append(of, f.Record+" "+f.Role); f.Text != want.text {
				t.Errorf("%s: %s, want %q", damage, f, want.text)
			}
		}, func(i *Inspection) error { return i.Spectra(t.Context()) })
		if err != nil || !slices.Equal(of, want.of) {
			t.Errorf("%s: faults of %v, %v, want of %v", damage, of, err, want.of)
		}
	}
}
