package db

import (
	"fmt"
	"math"
	"reflect"
	"slices"
	"testing"
)

// TestPiecesRestoreValues: of every type that SQL has of columns, bit by bit.
func TestPiecesRestoreValues(t *testing.T) {
	many := func(f func(i int) any) []any {
		out := make([]any, pieceRows)
		for i := range out {
			out[i] = f(i)
		}
		return out
	}
	for name, values := range map[string][]any{
		"nothing":         {},
		"NULL":            {nil, nil},
		"whole numbers":   {int64(7), int64(math.MaxInt64), int64(math.MinInt64), int64(0)},
		"doubles":         {0.1, math.Copysign(0, -1), math.Inf(1), math.SmallestNonzeroFloat64},
		"texts":           {"a", "", "é\x00b", "a longer one"},
		"words":           {"h1", "h2", "h1", "h1", "h2", "h2"},
		"one among NULL":  {nil, int64(5), nil},
		"doubles or NULL": {nil, 0.5, nil, 0.25},
		"texts or NULL":   {"x", nil, "y", ""},
		"words or NULL":   {"x", nil, "x", "x", "x"},
		"many numbers":    many(func(i int) any { return int64(i * i % 977) }),
		"many doubles":    many(func(i int) any { return math.Sqrt(float64(i)) }),
		"many texts":      many(func(i int) any { return fmt.Sprint("R", i) }),
		"256 texts twice": many(func(i int) any { return fmt.Sprint("R", i%256) }),
		"many words":      many(func(i int) any { return fmt.Sprint("R", i%255) }),
	} {
		for _, isLast := range []bool{false, true} {
			data, err := packPiece(values, isLast)
			if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
			p, err := unpackPiece(data)
			if err != nil || p.isLast != isLast || p.rows != len(values) {
				t.Fatalf("%s: %d values, last %v, %v", name, p.rows, p.isLast, err)
			}
			for i, want := range values {
				got := p.value(i)
				if x, isDouble := want.(float64); isDouble {
					if y, is := got.(float64); !is || math.Float64bits(x) != math.Float64bits(y) {
						t.Fatalf("%s: value %d is %v, want %v", name, i, got, want)
					}
				} else if got != want {
					t.Fatalf("%s: value %d is %#v, want %#v", name, i, got, want)
				}
			}
		}
	}
	for _, mixed := range [][]any{{int64(1), 0.5}, {"a", int64(1)}, {[]byte{1}}} {
		if _, err := packPiece(mixed, true); err == nil {
			t.Errorf("%v are packed", mixed)
		}
	}
}

// TestPiecesSetVariables: as a row of SQL would, or not at all.
func TestPiecesSetVariables(t *testing.T) {
	type variables struct {
		text   string
		number float64
		other  *float64
	}
	var v variables
	piecesOf := func(values ...any) piece {
		data, err := packPiece(values, true)
		if err != nil {
			t.Fatal(err)
		}
		p, err := unpackPiece(data)
		if err != nil {
			t.Fatal(err)
		}
		return p
	}
	texts, numbers, none := piecesOf("a", nil), piecesOf(0.5, nil), piecesOf(nil, nil)
	for _, err := range []error{texts.set(&v.text, 0), numbers.set(&v.number, 0), numbers.set(&v.other, 0)} {
		if err != nil {
			t.Error(err)
		}
	}
	if want := (variables{"a", 0.5, number(0.5)}); !reflect.DeepEqual(v, want) {
		t.Errorf("variables %v, want %v", v, want)
	}
	for _, err := range []error{texts.set(&v.text, 1), numbers.set(&v.other, 1), none.set(&v.other, 0)} {
		if err != nil {
			t.Error(err)
		}
	}
	if v.text != "" || v.other != nil {
		t.Errorf("NULL is %q, %v", v.text, v.other)
	}
	var whole int64
	for _, err := range []error{texts.set(&v.number, 0), numbers.set(&v.text, 0), numbers.set(&whole, 0), numbers.set(&v.number, 1), none.set(&whole, 0)} {
		if err == nil {
			t.Error("a variable of another type is set")
		}
	}
}

// FuzzUnpackPiece: what is no piece is refused, or read within its bounds.
func FuzzUnpackPiece(f *testing.F) {
	for _, values := range [][]any{{}, {nil}, {int64(1), int64(-5), nil}, {0.5, nil}, {"a", "bc"}, {"a", "a", "a", nil}} {
		data, err := packPiece(values, true)
		if err != nil {
			f.Fatal(err)
		}
		text, err := decoder.DecodeAll(data, nil)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		p, err := unpackPiece(encoder.EncodeAll(text, nil))
		if err != nil {
			return
		}
		values := make([]any, p.rows)
		for i := range values {
			values[i] = p.value(i)
		}
		again, err := packPiece(values, p.isLast)
		if err != nil {
			t.Fatal(err)
		}
		q, err := unpackPiece(again)
		if err != nil || q.rows != p.rows {
			t.Fatalf("%d values become %d: %v", p.rows, q.rows, err)
		}
		for i, v := range values {
			if w := q.value(i); !slices.Equal(appendValue(nil, v), appendValue(nil, w)) {
				t.Fatalf("value %d: %v becomes %v", i, v, w)
			}
		}
	})
}
