// Package fullfield runs propagations in the background of a command and keeps
// what they found.
//
// A Worker carries out one propagation at a time on one goroutine: the newest
// question first, then the nodes that anchor the bench's predictions, then
// what was asked for ahead. A Store keeps nodes in a file named after the
// digest of their inputs, so that the next start has them at once.
package fullfield
