// Package chart draws curves with Braille dots, two across and four down a
// character cell.
//
// A Plot has two axes with round ticks and takes histories (minimum to maximum
// of every dot column, so that a spike between two columns cannot vanish),
// curves, bands, level lines and marks. What is not a number is a gap, what
// lies outside the axes is left out, and a pane too small for a chart stays
// blank: no input makes it panic or draw beyond its area.
package chart
