// Package lines reads and writes the lines of instruments that simply talk.
// It does no I/O.
//
// A Pattern says how a line looks: literal text, and fields in braces.
//
//	EM {emission} nm W {width} nm S {strength} %
//
// A field is a number. {_} is a word to be passed over. A field that ends in
// three dots, {counts...}, is a list of numbers separated by commas,
// semicolons or blanks, such as a whole spectrum; a pattern has at most one.
// A brace itself is written twice. A run of blanks in the pattern stands for
// one or more blanks in the line; blanks at either end do not count.
//
// An instrument that has no value at the moment often writes so: "---",
// "nan" or 9.91E37 in place of a number is read as NaN, and the caller makes
// a failure of it. Anything else that does not fit the pattern is refused.
//
// A Checksum stands behind the text and an asterisk, as capital hexadecimal
// digits. XOR8 refuses every single wrong bit, but not two wrong bits in the
// same place of two characters; CRC16 refuses both.
package lines
