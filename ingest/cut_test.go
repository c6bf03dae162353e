package ingest

import (
	"strings"
	"testing"
)

// What is left of a number that was cut is a number: only how it stands among its
// neighbours shows it.
func TestRefuseCut(t *testing.T) {
	exponents := strings.Repeat("  -1.0000000E-04   2.0000000E-03\n", 6)
	counts := strings.Repeat("   10975   -4211     132 \n", 6)
	column := strings.Repeat("0.125\n-1.250\n", 6)
	for _, test := range []struct {
		name, text string
		isCut      bool
	}{
		{"exponent lost", exponents + "  -1.0000000E-04   2.0000000", true},
		{"exponent cut", exponents + "  -1.0000000E-04   2.0000000E-0", true},
		{"whole, without line end", exponents + "  -1.0000000E-04   2.0000000E-03", false},
		{"whole", exponents, false},
		{"first of a line", exponents + "  -1.00000", true},
		{"decimals cut", column + "-1.2", true},
		{"decimals whole", column + "-1.250", false},
		{"counts cut", counts + "   10975   -42", true},
		{"counts whole", counts + "   10975   -4211", false},
		{"as it comes", "0.1\n0.25\n3\n0.125\n0.5\n0.75\n0.2", false},
		{"of two columns", strings.Repeat("0.01 1.50\n0.02 2.50\n", 4) + "0.03 3.5", true},
		{"too few lines", "1.25\n1.25\n1.2", false},
		{"words at the end", exponents + "END", false},
	} {
		text, err := NewText([]byte(test.text))
		if err != nil {
			t.Fatal(err)
		}
		if err := refuseCut(text); (err != nil) != test.isCut {
			t.Errorf("%s: %v", test.name, err)
		}
	}
}
