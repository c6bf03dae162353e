// Package miniseed decodes miniSEED, versions 2.4 and 3: the records in which
// seismic networks pass on the samples of their digitisers, in any order and of
// any channels, one after the other.
//
// Promises: what a record announces is compared with what it holds; nothing is
// filled in where samples are missing; an error names the byte at which its
// record begins; memory is bounded by the size of the input.
//
// Start at Decode. Channel and Trace are what it returns.
//
// Sources: FDSN, miniSEED 3 specification (2023) with its mapping of version
// 2.4; the layout of the older blockettes and of Steim's frames is that of the
// SEED manual, version 2.4 (2012), from memory.
package miniseed
