// Package db is the store: one SQLite file, the only place that knows SQL.
//
// Plain structs go in and come out; nobody else sees a row or a statement.
// One handle writes, in transactions that a crash can only lose whole; a pool
// of read-only connections answers questions, each from one snapshot. Opening
// a store applies the migrations that it lacks, and refuses a store that is
// newer than the program.
//
// Start at Open. Tx is what a writer may do in one transaction, Snapshot what
// a reader sees.
package db
