// Package report lays out the answers of a study as one HTML page that needs nothing beside
// it: figures, tables, style and script are in the file, and no part of it is fetched. It
// reads without the script, which adds sorting, filters and values under the pointer.
//
// A page is a value; it depends on nothing but what it is made of, so that equal answers
// make equal pages.
package report
