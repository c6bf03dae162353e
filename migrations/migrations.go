// Package migrations holds the store's schema as numbered SQL files, embedded
// in the program. A file is one step; db applies the steps that a store lacks,
// in order, each in one transaction. Once released, a file is never edited.
package migrations

import "embed"

// FS holds the steps, named 00001_what_it_does.sql, 00002_….
//
//go:embed *.sql
var FS embed.FS
