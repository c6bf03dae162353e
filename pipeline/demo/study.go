package demo

import (
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
)

// Near is the selection of motions that the study asks about: strong shaking nearby.
const Near = "magnitude >= 5.5 and distance_km < 60"

// WriteStudy writes a study of the folder's records for the structures of the region, with a
// design spectrum, and returns its path. store is the store that it names, relative to the
// folder or absolute. All of it is invented.
func WriteStudy(dir, store string) (string, error) {
	path := filepath.Join(dir, "study.toml")
	for name, text := range map[string]string{
		path:                                  studyText(store),
		filepath.Join(dir, "structures.toml"): structuresText(),
		filepath.Join(dir, "design.toml"):     designText,
	} {
		if err := os.WriteFile(name, []byte(text), 0o666); err != nil {
			return "", fmt.Errorf("write study of the demo: %w", err)
		}
	}
	return path, nil
}

func studyText(store string) string {
	return fmt.Sprintf(`# Invented, as all that it is about.
name      = "Structures of %s"
purpose   = "What the motions of an invented region ask of its structures. Nothing of it is real."
store     = %s
sources   = ["."]
catalogue = "catalogue.csv"
recipe    = "standard"
report    = "report.html"

[selection.near]
where = %s

[spectrum.motions]
selection = "near"
design    = "design.toml"
mark      = ["0.45s", "0.9s", "1.35s"]

[demand.structures]
selection  = "near"
structures = "structures.toml"

[records.held]
selection = "near"
`, regionName, strconv.Quote(filepath.ToSlash(store)), strconv.Quote(Near))
}

// designText has round parameters of no place.
const designText = `name   = "Ground C, 0.2 g"
kind   = "en1998-1"
type   = 1
ground = "C"
agr_g  = 0.2
`

func structuresText() string {
	var b strings.Builder
	for _, s := range Structures() {
		fmt.Fprintf(&b, "[[structure]]\nid = %q\n", s.Name)
		for _, entry := range [][2]string{{"period", s.Period}, {"stiffness", s.Stiffness}, {"weight", s.Weight}, {"damping", s.Damping}, {"height", s.Height}, {"max_base_shear", s.MaxBaseShear}} {
			if entry[1] != "" {
				fmt.Fprintf(&b, "%s = %q\n", entry[0], entry[1])
			}
		}
		b.WriteByte('\n')
	}
	return b.String()
}
