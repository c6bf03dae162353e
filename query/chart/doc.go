// Package chart draws charts of spectra, demands, records and lists of them from plain numbers, as SVG and PNG. It knows
// neither the store nor questions.
//
// A chart is a value with a Draw method; Write makes the file. Colours and line styles are
// those of palette.go, and mean the same in every chart. Nothing on a chart depends on
// colour alone.
package chart
