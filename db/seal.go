package db

import (
	"database/sql/driver"
	"fmt"
	"hash/crc32"

	"modernc.org/sqlite"
)

// castagnoli is the polynomial of CRC-32C, for which processors have an instruction.
var castagnoli = crc32.MakeTable(crc32.Castagnoli)

func sealOf(text []byte) int64 { return int64(crc32.Checksum(text, castagnoli)) }

// sealedText is the text of a spectrum as it is stored, with its checksum.
type sealedText struct {
	text []byte
	seal int64
}

// open returns the text, nil where it is not what was stored.
func (s sealedText) open() []byte {
	if sealOf(s.text) != s.seal {
		return nil
	}
	return s.text
}

// The step that gave spectra their checksums computes them in SQL.
func init() {
	sqlite.MustRegisterDeterministicScalarFunction("crc32c", 1, func(_ *sqlite.FunctionContext, args []driver.Value) (driver.Value, error) {
		text, ok := args[0].([]byte)
		if !ok {
			return nil, fmt.Errorf("crc32c of %T, want bytes", args[0])
		}
		return sealOf(text), nil
	})
}
