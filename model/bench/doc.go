// Package bench reads the bench file: bytes in, a typed bench out, every
// mistake named with line and column. It does no I/O.
//
// The file is TOML. Parse proves its syntax, lays it out as a tree that knows
// where everything was written, fills Bench from the tree and then checks what
// the keys mean together. It does not stop at the first mistake: one run of
// the checker shows them all, in the words of the file and never of the code.
//
// A key is a field of a struct in this package and nothing else: its tag toml
// is the key, its tag bench the rules that hold for it alone:
//
//	required         the section cannot do without it
//	default=2 s      what stands where the file says nothing
//	oneof=a|b|c      the texts allowed
//	above=0 bar      the value must be larger than this
//	least=0 bar      the value must not be smaller than this
//	most=1 mm        the value must not be larger than this
//	gauge            a gauge pressure such as "16 bar(g)" may be written too
//
// Rules are separated by semicolons and written as the user would write them.
// Defaults that depend on another key, such as the parity of a serial line on
// its protocol, are in defaults.go. What holds between keys is in check.go and
// checkinstrument.go.
//
// Unknown keys are refused, because a mistyped limit would be no limit. A
// number without a unit is refused too. A gauge pressure is made absolute
// with panel.ambient, and refused where that is not given.
package bench
