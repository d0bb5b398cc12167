// Package unit holds the quantities of the bench and their text.
//
// A quantity is a float64 type named for the SI unit that it holds, so that a
// signature says "in what?" and swapped arguments do not compile. Text always
// carries its unit: "9 bar", "34 um", "22.5 degC". A number without one is an
// error that says which unit was expected.
//
// Pressure is absolute. A pressure above ambient is a GaugePascal, a type of
// its own without a String method: it becomes a Pascal only by naming the
// ambient pressure.
//
// The package is a leaf: it imports nothing of this project.
package unit
