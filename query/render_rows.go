package query

import (
	"bufio"
	"fmt"
	"io"
)

// writeRows writes a list of rows in one of the formats. CSV and JSON have a line a row, and
// are written some rows at a time: a list may have as many rows as the store has components.
func writeRows[T any](w io.Writer, what string, format Format, rows []T, table func() []byte, header []string, line func(*T, *csvLine)) error {
	out := bufio.NewWriterSize(w, 64<<10)
	var err error
	switch format {
	case FormatTable, "":
		return writeText(w, what, table())
	case FormatCSV:
		err = csvLines(out, rows, header, line)
	case FormatJSON:
		err = jsonLines(out, rows)
	default:
		_, err = ParseFormat(string(format))
		return err
	}
	if err == nil {
		err = out.Flush()
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", what, err)
	}
	return nil
}

func csvLines[T any](w io.Writer, rows []T, header []string, line func(*T, *csvLine)) error {
	var l csvLine
	l.words(header...)
	l.end()
	for i := range rows {
		if _, err := w.Write(l.text); err != nil {
			return err
		}
		l.text = l.text[:0]
		line(&rows[i], &l)
	}
	_, err := w.Write(l.text)
	return err
}

// jsonLines writes rows as an array with a line a row.
func jsonLines[T any](w io.Writer, rows []T) error {
	if len(rows) == 0 {
		_, err := io.WriteString(w, "[]\n")
		return err
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
		if _, err := w.Write(append(text, '\n')); err != nil {
			return err
		}
		text = text[:0]
	}
	_, err := io.WriteString(w, "]\n")
	return err
}
