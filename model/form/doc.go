// Package form reads configuration: TOML text in, a filled struct out, every
// mistake named with line and column in the words of the file and never of the
// code. It does no I/O.
//
// Reading proves the syntax, lays the file out as a tree that knows where
// everything was written, and fills the struct from the tree. It does not stop
// at the first mistake: one reading shows them all.
//
// A key is a field of a struct and nothing else: its tag toml is the key, its
// tag form the rules that hold for it alone:
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
//
// Unknown keys are refused, because a mistyped limit would be no limit. A
// number without a unit is refused too. A gauge pressure is made absolute
// with the ambient pressure, and refused where that is not given.
package form
