package db

import (
	"database/sql"
	"database/sql/driver"
	"encoding/binary"
	"encoding/json"
	"fmt"
	"hash/crc32"
	"math"

	"modernc.org/sqlite"
)

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

// sealOf is the checksum that is stored beside bytes which read as well where one of them
// has become another.
func sealOf(data []byte) int64 { return int64(crc32.Checksum(data, castagnoli)) }

// sealer makes checksums of rows, in room of its own.
type sealer []byte

// row is the checksum of a row's values, each behind a byte that tells its type.
func (b *sealer) row(values ...any) int64 {
	text := (*b)[:0]
	for _, v := range values {
		before := len(text)
		text = append(text, 0)
		text = appendValue(text, v)
		text[before] = byte(len(text) - before) // so that no byte can go over to its neighbour
	}
	*b = text
	return sealOf(text)
}

// appendValue appends the bytes of a value, as SQL has it or as a variable that a row was
// read into: none of NULL and, since texts that are NULL are read as empty ones, of these.
func appendValue(dst []byte, v any) []byte {
	switch v := v.(type) {
	case nil:
	case int64:
		return binary.LittleEndian.AppendUint64(dst, uint64(v))
	case float64:
		return binary.LittleEndian.AppendUint64(dst, math.Float64bits(v))
	case string:
		return append(dst, v...)
	case []byte: // of a damaged row: none is sealed, and no text is to pass for one
		return append(append(dst, v...), 0xff)
	case *int64:
		return appendValue(dst, *v)
	case *int:
		return appendValue(dst, int64(*v))
	case *float64:
		if v != nil {
			return appendValue(dst, *v)
		}
	case *string:
		return append(dst, *v...)
	case **float64:
		return appendValue(dst, *v)
	case *sql.NullInt64:
		if v.Valid {
			return appendValue(dst, v.Int64)
		}
	case *sql.NullString:
		return append(dst, v.String...)
	default:
		panic(fmt.Sprintf("db: checksum of %T", v))
	}
	return dst
}

// columnSums adds up checksums of rows column by column: of each value, behind the key of
// its row. So they can be compared by whoever reads some of the columns, in any order, and
// no value can change its place.
type columnSums struct {
	rows int64
	sums []int64
	room []byte
}

// add takes the key and the values of a row.
func (c *columnSums) add(key, values []any) {
	room := c.room[:0]
	for _, v := range key {
		room = appendValue(room, v)
	}
	of := crc32.Checksum(room, castagnoli)
	for i, v := range values {
		room = appendValue(room[:0], v)
		c.sums[i] += int64(crc32.Update(of, castagnoli, room))
	}
	c.rows++
	c.room = room
}

// values are some of SQL's as appendValue takes them.
func values(dst []any, of []driver.Value) []any {
	dst = dst[:0]
	for _, v := range of {
		dst = append(dst, v)
	}
	return dst
}

// columnSumsOf is SQL's column_sums(n, key, …, value, …), of keys of n columns: a JSON array
// of the sums.
type columnSumsOf struct {
	columnSums
	key, values []any
}

func (c *columnSumsOf) Step(_ *sqlite.FunctionContext, args []driver.Value) error {
	n, ok := args[0].(int64)
	if !ok || n < 1 || int(n) >= len(args) {
		return fmt.Errorf("column_sums of %d values, of which %v are the key", len(args)-1, args[0])
	}
	if c.sums == nil {
		c.sums = make([]int64, len(args)-1-int(n))
	}
	c.key, c.values = values(c.key, args[1:1+n]), values(c.values, args[1+n:])
	c.add(c.key, c.values)
	return nil
}

// WindowInverse is for windows, of which there are none.
func (c *columnSumsOf) WindowInverse(*sqlite.FunctionContext, []driver.Value) error {
	return fmt.Errorf("column_sums of a window")
}

// WindowValue returns the sums.
func (c *columnSumsOf) WindowValue(*sqlite.FunctionContext) (driver.Value, error) {
	text, err := json.Marshal(c.sums)
	return string(text), err
}

// Final has nothing to release.
func (c *columnSumsOf) Final(*sqlite.FunctionContext) {}

// SQL computes checksums by the same code: crc32c of bytes, or of several values as of a row,
// and column_sums.
func init() {
	sqlite.MustRegisterFunction("crc32c", &sqlite.FunctionImpl{NArgs: -1, Deterministic: true, VolatileArgs: true,
		Scalar: func(_ *sqlite.FunctionContext, args []driver.Value) (driver.Value, error) {
			if text, ok := args[0].([]byte); ok && len(args) == 1 {
				return sealOf(text), nil
			}
			var b sealer
			return b.row(values(nil, args)...), nil
		}})
	sqlite.MustRegisterFunction("column_sums", &sqlite.FunctionImpl{NArgs: -1, Deterministic: true, VolatileArgs: true,
		MakeAggregate: func(sqlite.FunctionContext) (sqlite.AggregateFunction, error) { return &columnSumsOf{}, nil }})
}
