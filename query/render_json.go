package query

import (
	"bytes"
	"encoding/json"
	"fmt"
	"strconv"
	"strings"
)

// object is a JSON object whose fields keep their order.
type object []field

type field struct {
	name  string
	value any
}

// jsonText renders an object for programs and for people: objects that hold
// objects have a line a field, all else stands in one line. Numbers are written
// in the fewest digits that restore them; NaN and infinity become null.
func jsonText(o object) ([]byte, error) {
	dst, err := appendJSON(nil, o, 0)
	return append(dst, '\n'), err
}

func appendJSON(dst []byte, v any, depth int) ([]byte, error) {
	switch v := v.(type) {
	case nil:
		return append(dst, "null"...), nil
	case object:
		return appendObject(dst, v, depth)
	case float64:
		return appendNumber(dst, v), nil
	case int:
		return strconv.AppendInt(dst, int64(v), 10), nil
	case []float64:
		return appendArray(dst, v, depth)
	case []int:
		return appendArray(dst, v, depth)
	case []string:
		return appendArray(dst, v, depth)
	case []object:
		return appendArray(dst, v, depth)
	case []*RecordRow:
		return appendArray(dst, v, depth)
	case string, bool, *RecordRow:
		return appendMarshalled(dst, v)
	}
	return dst, fmt.Errorf("write JSON: no rule for %T", v)
}

func appendNumber(dst []byte, x float64) []byte {
	if !isDefined(x) {
		return append(dst, "null"...)
	}
	return strconv.AppendFloat(dst, x, 'g', -1, 64)
}

func appendObject(dst []byte, o object, depth int) ([]byte, error) {
	separator, opening, closing := ", ", "{", "}"
	if depth == 0 || o.isDeep() {
		indent := "\n" + strings.Repeat("  ", depth)
		separator, opening, closing = ","+indent+"  ", "{"+indent+"  ", indent+"}"
	}
	dst = append(dst, opening...)
	for i, f := range o {
		if i > 0 {
			dst = append(dst, separator...)
		}
		var err error
		if dst, err = appendMarshalled(dst, f.name); err != nil {
			return dst, err
		}
		if dst, err = appendJSON(append(dst, ": "...), f.value, depth+1); err != nil {
			return dst, err
		}
	}
	return append(dst, closing...), nil
}

// isDeep reports whether the object holds an object that holds something.
func (o object) isDeep() bool {
	for _, f := range o {
		if inner, ok := f.value.(object); ok && len(inner) > 0 {
			return true
		}
	}
	return false
}

func appendArray[T any](dst []byte, list []T, depth int) ([]byte, error) {
	dst = append(dst, '[')
	for i, v := range list {
		if i > 0 {
			dst = append(dst, ", "...)
		}
		var err error
		if dst, err = appendJSON(dst, v, depth+1); err != nil {
			return dst, err
		}
	}
	return append(dst, ']'), nil
}

// appendMarshalled appends what package json makes of v, in one line and
// without the escapes that are for web pages.
func appendMarshalled(dst []byte, v any) ([]byte, error) {
	var b bytes.Buffer
	encoder := json.NewEncoder(&b)
	encoder.SetEscapeHTML(false)
	if err := encoder.Encode(v); err != nil {
		return dst, fmt.Errorf("write JSON: %w", err)
	}
	return append(dst, bytes.TrimRight(b.Bytes(), "\n")...), nil
}

// object describes the selection.
func (r *SelectionReport) object() object {
	o := object{
		{"where", r.Where},
		{"component", string(r.Component)},
		{"records", r.Records},
		{"spectra", r.Spectra},
		{"events", r.Events},
		{"siting", string(r.Siting)},
		{"recipe", r.Recipe},
		{"screen", string(r.Screen)},
	}
	o = append(o, r.Scope.fields()...)
	if !r.Balance.isNone() {
		o = append(o, field{"balance", string(r.Balance)})
	}
	if r.Method != defaultMethod {
		o = append(o, field{"method", r.Method.String()})
	}
	leftOut := make([]object, len(r.LeftOut))
	for i, l := range r.LeftOut {
		leftOut[i] = object{{"reason", l.Reason}, {"records", l.Records}}
	}
	return append(o, field{"left_out", leftOut}, field{"notes", append([]string{}, r.Notes...)})
}
