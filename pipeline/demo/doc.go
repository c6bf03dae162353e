// Package demo writes an invented earthquake catalogue with its records: a
// region that does not exist, five networks that each write one published
// record format, and motions simulated by the stochastic method.
//
// Promises: the same options give the same bytes, whatever the number of
// processors; headers and samples agree with each other to the digits printed;
// nothing in the files is measured, and each file says that it is invented as
// far as its format has room for words.
//
// Start at Write. Structures lists a few invented structures to ask about.
package demo
