// Package parquet writes rows of plain structs as Apache Parquet files that say what their
// numbers are in.
//
// A column is a field with the tags parquet, of github.com/parquet-go/parquet-go, and unit.
// Every file is written with what reads nearly everywhere: data pages of version 1, numbers
// plain, words in dictionaries, zstd. BYTE_STREAM_SPLIT would save a tenth of a file of
// ordinates, and not every reader knows it. Units stand in the metadata of the Arrow schema
// (key ARROW:schema), field by field, and once more as key-value metadata of the file, for
// readers that look at no Arrow schema. Equal rows make equal bytes.
//
// Start at NewWriter.
package parquet
