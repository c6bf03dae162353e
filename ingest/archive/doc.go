// Package archive reads the files inside archives where they lie: zip, tar, tar
// under gzip or bzip2, and single files under gzip or bzip2, each recognised by
// its content; archives inside archives as deep as the limits allow.
//
// Promises: nothing is written anywhere; a member's name is a label, and no path
// that could be opened is made of it; what an archive may cost in memory and time
// is bounded by its own size (Limits); damage costs what lies behind it and no
// more, and is reported once, with the member at which it was met.
//
// Start at Members.
package archive
