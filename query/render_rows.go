package query

import (
	"bufio"
	"fmt"
	"io"
)

// writeRows writes a list of rows in one of the formats. CSV and JSON have a line a row, and
// are written some rows at a time: a list may have as many rows as the store has components.
func writeRows[T any](w io.Writer, what string, format Format, rows []T, table func() []byte, header []string, line func(*T, *csvLine)) error {
	switch format {
	case FormatTable, "":
		return writeText(w, what, table())
	case FormatCSV:
		return writeLines(w, what, func(put func([]byte) error) error { return csvLines(rows, header, line, put) })
	case FormatJSON:
		return writeLines(w, what, func(put func([]byte) error) error { return jsonLines(rows, put) })
	}
	_, err := ParseFormat(string(format))
	return err
}

// writeLines writes what lines gives to put, one after the other.
func writeLines(w io.Writer, what string, lines func(put func([]byte) error) error) error {
	out := bufio.NewWriterSize(w, 64<<10)
	err := lines(func(text []byte) error {
		_, err := out.Write(text)
		return err
	})
	if err == nil {
		err = out.Flush()
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", what, err)
	}
	return nil
}

func csvLines[T any](rows []T, header []string, line func(*T, *csvLine), put func([]byte) error) error {
	var l csvLine
	l.words(header...)
	l.end()
	for i := range rows {
		if err := put(l.text); err != nil {
			return err
		}
		l.text = l.text[:0]
		line(&rows[i], &l)
	}
	return put(l.text)
}

// jsonLines gives rows as an array with a line a row.
func jsonLines[T any](rows []T, put func([]byte) error) error {
	if len(rows) == 0 {
		return put([]byte("[]\n"))
	}
	text := []byte("[\n")
	for i := range rows {
		var err error
		if text, err = appendMarshalled(text, &rows[i]); err != nil {
			return err
		}
		if i < len(rows)-1 {
			text = append(text, ',')
		}
		if err := put(append(text, '\n')); err != nil {
			return err
		}
		text = text[:0]
	}
	return put([]byte("]\n"))
}
