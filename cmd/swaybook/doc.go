// Command swaybook reads recorded ground accelerations into a store of response
// spectra and answers what they demand of structures.
//
// There is one file a command: its constructor, its options, and a function
// that runs it. main.go holds the exit codes, flags.go what commands share.
package main
