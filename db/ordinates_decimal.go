package db

import (
	"bytes"
	"database/sql/driver"
	"fmt"
	"math"
	"strconv"

	"modernc.org/sqlite"
)

// decimalWidth is how many characters a value of a spectrum had while these were decimals of
// 17 digits, right-aligned.
const decimalWidth = 24

// doublesOfDecimals are spectra as they are stored of what they were stored as before, nil of
// what no program wrote.
func doublesOfDecimals(text []byte) []byte {
	if len(text)%decimalWidth != 0 {
		return nil
	}
	out := make([]byte, 0, len(text)/decimalWidth*OrdinateWidth)
	for ; len(text) > 0; text = text[decimalWidth:] {
		x, err := strconv.ParseFloat(string(bytes.TrimLeft(text[:decimalWidth], " ")), 64)
		if err != nil || math.Signbit(x) {
			return nil
		}
		out = encodeOrdinates(out, []float64{x})
	}
	return out
}

// SQL converts spectra by doubles_of_decimals, in one migration.
func init() {
	sqlite.MustRegisterFunction("doubles_of_decimals", &sqlite.FunctionImpl{NArgs: 1, Deterministic: true, VolatileArgs: true,
		Scalar: func(_ *sqlite.FunctionContext, args []driver.Value) (driver.Value, error) {
			text, ok := args[0].([]byte)
			if !ok {
				return nil, fmt.Errorf("spectrum of type %T", args[0])
			}
			if sd := doublesOfDecimals(text); sd != nil {
				return sd, nil
			}
			return nil, nil // NULL
		}})
}
