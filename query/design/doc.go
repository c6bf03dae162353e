// Package design reads elastic design spectra that somebody describes in a file,
// and gives their ordinates, to stand beside those of records.
//
// A file is TOML of one spectrum. National parameters are the user's; only what
// the text of a standard recommends is kept here, and taken by naming a ground
// type. Keys that a kind does not take are mistakes.
//
//	key                unit  of
//	name               -     all; the file's name without its extension if missing
//	kind               -     all: "en1998-1", "asce7" or "table"
//
//	direction          -     en1998-1: "horizontal", also if missing, or "vertical"
//	type               -     en1998-1: 1 or 2, the type of spectrum
//	ground             -     en1998-1, horizontal: "A" to "E"
//	parameters         -     en1998-1: a table of one's own values instead of type and ground
//	agr_g or agr_m_s2  g or  en1998-1: the reference peak ground acceleration on ground A, the
//	                   m/s²  horizontal one for the vertical spectrum too
//	importance_factor  -     en1998-1: 1 if missing, that of importance class II
//
//	s                  -     parameters, horizontal: the soil factor
//	vertical_share     -     parameters, vertical: avg/ag
//	tb_s, tc_s, td_s   s     parameters: corner periods
//	te_s, tf_s         s     parameters, horizontal: those of Annex A, both or none
//	amplification      -     parameters: of the plateau at 5 %; 2.5, vertical 3, if missing
//
//	sds_g, sd1_g       g     asce7: design accelerations of short periods and at 1 s
//	tl_s               s     asce7: the long-period transition
//
//	file               -     table: a CSV file, relative to the TOML file
//	damping            -     table: the damping ratio that it is for, "5%" or 0.05
//	period_unit        -     table: s or ms, unless the CSV file says so
//	value_unit         -     table: g, m/s2, cm/s2 (PSA), m/s, cm/s (PSV), m, cm, mm (SD),
//	                         unless the CSV file says so
//
//	eta                -     asce7, table: "en1998" scales them to other dampings by
//	                         η(ξ)/η(ξ0), at all periods alike
//
// An EN 1998-1 spectrum ends at 4 s, unless it is horizontal of type 1 or has
// te_s and tf_s: then Annex A goes on.
//
// A CSV file has two columns, period and value, split by commas, semicolons or
// tabs, perhaps below a row of names that end in units (period_s,psa_g or
// T [s],PSA [m/s2]), and perhaps a third column named unit. Periods ascend; lines
// that begin with # do not count. Between two points a spectrum is straight in
// the logarithms of period and value, which is the same for PSA, PSV and SD;
// between a first point at period 0, of PSA only, and the second it is straight
// in both themselves. Outside its points a table has no value.
//
// All ordinates are pseudo-accelerations PSA = ω²·SD in g, 9.80665 m/s². They
// do not depend on the architecture.
//
// Start at Read and Spectrum.PSAg.
package design
