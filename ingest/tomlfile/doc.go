// Package tomlfile reads TOML documents that people write for us, and keeps
// what decoding loses: in which line each key stands.
//
// Start with Parse.
package tomlfile
