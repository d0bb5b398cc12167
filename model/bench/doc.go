// Package bench reads the bench file: bytes in, a typed bench out, every
// mistake named with line and column. It does no I/O.
//
// The file is TOML, read by package form: a key is a field of a struct here,
// its tag form the rules that hold for it alone. Defaults that depend on
// another key, such as the parity of a serial line on its protocol, are in
// defaults.go. What holds between keys is in check.go and checkinstrument.go.
package bench
