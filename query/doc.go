// Package query answers questions to a store: statistics of response spectra
// over a selection of motions, the demand that they put on one structure, the
// list of what is held, and the export of ordinates.
//
// A question is a struct of typed fields (SpectrumQuestion, DemandQuestion,
// RecordsQuestion, RecordQuestion, ExportQuestion) with a method Ask or Write; an answer is a
// struct with a method Write that renders it as a table, CSV or JSON. The
// Parse functions turn the text that people write, quantities with units among
// it, into those fields. What a person asked wrongly is a UsageError; a
// selection that holds no motion is an EmptyError that says what left the
// records out.
//
// Promises: every question reads one snapshot of the store. Nothing is
// interpolated: an ordinate off the stored grid is computed from the stored
// samples. Motions are taken in the order of record code and role and summed in
// that order, so the answer does not depend on the order of ingest or on the
// number of workers. Undefined figures are NaN inside and null, an empty cell or
// "-" outside. g is 9.80665 m/s².
//
// Start at SpectrumQuestion.Ask; the way of a question is select, load, reduce,
// render.
package query
