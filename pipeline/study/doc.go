// Package study reads the file that describes a study: a store, the sources that
// fill it, how it is computed, and the questions whose answers are written after
// each run.
//
// It knows what a study is made of, not what the values of flags mean: those
// that commands share with a study come as a Vocabulary, their values leave as
// Settings, and the commands read them. What is wrong is told all at once, each
// mistake with its line.
//
// Start with Parse.
package study
