package main

import (
	"database/sql"
	"errors"
	"fmt"
	"strings"
	"time"

	_ "github.com/duckdb/duckdb-go/v2"
)

// from is what DuckDB reads a table from.
func from(dir, name string) string {
	path := strings.ReplaceAll(dir+"/"+name, "'", "''")
	if name == "ordinates" {
		return "read_parquet('" + path + "/*/*.parquet', hive_partitioning = true, hive_types = {'damping': DOUBLE})"
	}
	return "read_parquet('" + path + "/*.parquet')"
}

func readDuckDB(dir, name string, columns []string) (*table, error) {
	return ask(columns, `SELECT "`+strings.Join(columns, `", "`)+`" FROM `+from(dir, name))
}

func ask(columns []string, question string, args ...any) (out *table, err error) {
	db, err := sql.Open("duckdb", "")
	if err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, db.Close()) }()
	rows, err := db.Query(question, args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	out = &table{columns: columns}
	values, into := make([]any, len(columns)), make([]any, len(columns))
	for i := range values {
		into[i] = &values[i]
	}
	for rows.Next() {
		if err := rows.Scan(into...); err != nil {
			return nil, err
		}
		row := make([]string, len(columns))
		for i, v := range values {
			if row[i], err = cellOf(v); err != nil {
				return nil, fmt.Errorf("%s: %w", columns[i], err)
			}
		}
		out.rows = append(out.rows, row)
	}
	return out, rows.Err()
}

func cellOf(v any) (string, error) {
	switch v := v.(type) {
	case nil:
		return "", nil
	case string:
		return word(v), nil
	case float64:
		return number(v), nil
	case int64:
		return fmt.Sprint(v), nil
	case time.Time:
		return moment(v), nil
	case map[string]any:
		of := map[string]string{}
		for name, x := range v {
			cell, err := cellOf(x)
			if err != nil {
				return "", err
			}
			of[name] = cell
		}
		return finding(of), nil
	case []any:
		var words []string
		for _, x := range v {
			word, err := cellOf(x)
			if err != nil {
				return "", err
			}
			words = append(words, word)
		}
		return list(words), nil
	}
	return "", fmt.Errorf("a value of type %T", v)
}

// checkPeriod asks DuckDB for one period at one damping.
func checkPeriod(dir string, all *table) error {
	middle := all.rows[len(all.rows)*5/9]
	damping, period := middle[2], middle[3]
	got, err := ask(all.columns, `SELECT "`+strings.Join(all.columns, `", "`)+`" FROM `+from(dir, "ordinates")+` WHERE damping = ?::DOUBLE AND period_s = ?::DOUBLE`, damping, period)
	if err == nil {
		err = compare(got, all.where("damping", damping).where("period_s", period))
	}
	if err != nil {
		return fmt.Errorf("ordinates of %s s by DuckDB: %w", period, err)
	}
	fmt.Printf("ordinates of %s s at a damping of %s by DuckDB: %d rows\n", period, damping, len(got.rows))
	return nil
}
