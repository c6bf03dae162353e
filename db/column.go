package db

import (
	"database/sql"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
)

// pieceRows is how many values of a column are packed as one: large against what a row of SQL
// costs, small against a process.
const pieceRows = 4096

// piece is some values of a column, of one type but for those that are NULL.
type piece struct {
	rows   int
	isLast bool // of the column
	isNull []bool
	ints   []int64
	floats []float64
	texts  []string
}

// The types of values, as they are written.
const (
	pieceEmpty byte = iota // all are NULL
	pieceInts
	pieceFloats
	pieceTexts
	pieceWords // few texts, each often
)

// errPiece says that a piece, or its place, is not what was laid out.
var errPiece = errors.New("not what was laid out")

// packPiece packs values as SQL has them: the type, whether the piece is the last, how many
// there are, which are NULL, and the values, whole numbers as differences and texts that
// repeat as the numbers of words. What repeats otherwise is left to the compressor.
func packPiece(values []any, isLast bool) ([]byte, error) {
	kind, nulls, err := kindOf(values)
	if err != nil {
		return nil, err
	}
	out := []byte{kind, 0}
	if isLast {
		out[1] = 1
	}
	out = binary.AppendUvarint(out, uint64(len(values)))
	out = binary.AppendUvarint(out, uint64(nulls))
	if nulls > 0 && kind != pieceEmpty {
		for _, v := range values {
			is := byte(0)
			if v == nil {
				is = 1
			}
			out = append(out, is)
		}
	}
	switch kind {
	case pieceInts:
		out = appendInts(out, values)
	case pieceFloats:
		for _, v := range values {
			x, _ := v.(float64)
			out = binary.LittleEndian.AppendUint64(out, math.Float64bits(x))
		}
	case pieceTexts, pieceWords:
		out = appendTexts(out, values, kind == pieceWords)
	}
	return encoder.EncodeAll(out, nil), nil
}

// kindOf is the type of the values that are not NULL, of which there are some.
func kindOf(values []any) (kind byte, nulls int, err error) {
	words := map[string]bool{}
	for _, v := range values {
		of := pieceEmpty
		switch v := v.(type) {
		case nil:
			nulls++
			continue
		case int64:
			of = pieceInts
		case float64:
			of = pieceFloats
		case string:
			of = pieceTexts
			words[v] = true
		}
		if of == pieceEmpty || kind != pieceEmpty && kind != of {
			return 0, 0, fmt.Errorf("%w: %T among others", errPiece, v)
		}
		kind = of
	}
	if kind == pieceTexts && len(words) <= math.MaxUint8 && 2*len(words) <= len(values) {
		kind = pieceWords
	}
	return kind, nulls, nil
}

func appendInts(dst []byte, values []any) []byte {
	last := int64(0)
	for _, v := range values {
		n, ok := v.(int64)
		if !ok {
			n = last // of NULL no difference
		}
		dst, last = binary.AppendVarint(dst, n-last), n
	}
	return dst
}

// appendTexts appends the lengths of the texts and then these, or, of words, so each once,
// their number before and the place among them of each value behind them.
func appendTexts(dst []byte, values []any, isWords bool) []byte {
	texts, places := make([]string, 0, len(values)), make([]byte, 0, len(values))
	at := map[string]byte{}
	for _, v := range values {
		text, _ := v.(string)
		place, isKnown := at[text]
		if !isKnown || !isWords {
			texts = append(texts, text)
		}
		if isWords {
			if !isKnown {
				place = byte(len(at))
				at[text] = place
			}
			places = append(places, place)
		}
	}
	if isWords {
		dst = binary.AppendUvarint(dst, uint64(len(texts)))
	}
	for _, text := range texts {
		dst = binary.AppendUvarint(dst, uint64(len(text)))
	}
	for _, text := range texts {
		dst = append(dst, text...)
	}
	return append(dst, places...)
}

// unpackPiece restores what packPiece packed. A NULL is 0 or "".
func unpackPiece(data []byte) (p piece, err error) {
	data, err = decoder.DecodeAll(data, nil)
	if err != nil || len(data) < 2 || data[1] > 1 {
		return p, errors.Join(errPiece, err)
	}
	r := pieceReader{data: data[2:]}
	p.isLast = data[1] == 1
	p.rows = r.count(pieceRows)
	nulls, kind := r.count(p.rows), data[0]
	if nulls > 0 {
		p.isNull = make([]bool, p.rows)
		for i := range p.isNull {
			p.isNull[i] = kind == pieceEmpty || r.byte() == 1
		}
	}
	switch kind {
	case pieceEmpty:
	case pieceInts:
		p.ints = r.ints(p.rows)
	case pieceFloats:
		p.floats = r.floats(p.rows)
	case pieceTexts:
		p.texts = r.texts(p.rows)
	case pieceWords:
		p.texts = r.words(p.rows)
	default:
		r.isBad = true
	}
	if r.isBad || len(r.data) > 0 || kind == pieceEmpty && nulls != p.rows {
		return piece{}, errPiece
	}
	return p, nil
}

// pieceReader reads on, or gives nothing once something was not there.
type pieceReader struct {
	data  []byte
	isBad bool
}

func (r *pieceReader) skip(n int) []byte {
	if n > len(r.data) {
		r.isBad, r.data = true, nil
		return make([]byte, n)
	}
	out := r.data[:n]
	r.data = r.data[n:]
	return out
}

func (r *pieceReader) byte() byte { return r.skip(1)[0] }

// count reads a number that is not above most.
func (r *pieceReader) count(most int) int {
	n, size := binary.Uvarint(r.data)
	if size <= 0 || n > uint64(most) {
		r.isBad, r.data = true, nil
		return 0
	}
	r.data = r.data[size:]
	return int(n)
}

func (r *pieceReader) ints(n int) []int64 {
	out, last := make([]int64, n), int64(0)
	for i := range out {
		x, size := binary.Varint(r.data)
		if size <= 0 {
			r.isBad, r.data = true, nil
			break
		}
		r.data = r.data[size:]
		last += x
		out[i] = last
	}
	return out
}

func (r *pieceReader) floats(n int) []float64 {
	out, from := make([]float64, n), r.skip(8*n)
	for i := range out {
		out[i] = math.Float64frombits(binary.LittleEndian.Uint64(from[8*i:]))
	}
	return out
}

// texts are cut out of one, which a piece costs one allocation instead of one a value.
func (r *pieceReader) texts(n int) []string {
	out, ends := make([]string, n), make([]int, n)
	end := 0
	for i := range ends {
		end += r.count(len(r.data))
		ends[i] = end
	}
	if end > len(r.data) {
		r.isBad = true
		return out
	}
	all, from := string(r.skip(end)), 0
	for i, to := range ends {
		out[i], from = all[from:to], to
	}
	return out
}

func (r *pieceReader) words(n int) []string {
	words := r.texts(r.count(math.MaxUint8 + 1))
	out := make([]string, n)
	for i, at := range r.skip(n) {
		if int(at) >= len(words) {
			r.isBad = true
			break
		}
		out[i] = words[at]
	}
	return out
}

// set sets a variable to a value, as SQL would.
func (p *piece) set(v any, i int) error {
	if p.isNull != nil && p.isNull[i] {
		return setNull(v)
	}
	switch v := v.(type) {
	case *string:
		if p.texts != nil {
			*v = p.texts[i]
			return nil
		}
	case *float64:
		if p.floats != nil {
			*v = p.floats[i]
			return nil
		}
	case **float64:
		if p.floats != nil {
			*v = &p.floats[i]
			return nil
		}
	case *int64:
		if p.ints != nil {
			*v = p.ints[i]
			return nil
		}
	case *int:
		if p.ints != nil {
			*v = int(p.ints[i])
			return nil
		}
	case *sql.NullInt64:
		if p.ints != nil {
			*v = sql.NullInt64{Int64: p.ints[i], Valid: true}
			return nil
		}
	case *sql.NullString:
		if p.texts != nil {
			*v = sql.NullString{String: p.texts[i], Valid: true}
			return nil
		}
	}
	return fmt.Errorf("%w for a %T", errPiece, v)
}

// value is a value as SQL has it.
func (p *piece) value(i int) any {
	switch {
	case p.isNull != nil && p.isNull[i]:
		return nil
	case p.ints != nil:
		return p.ints[i]
	case p.floats != nil:
		return p.floats[i]
	}
	return p.texts[i]
}

func setNull(v any) error {
	switch v := v.(type) {
	case *string:
		*v = ""
	case **float64:
		*v = nil
	case *sql.NullInt64:
		*v = sql.NullInt64{}
	case *sql.NullString:
		*v = sql.NullString{}
	default:
		return fmt.Errorf("%w: NULL for a %T", errPiece, v)
	}
	return nil
}
