// Package anchor lends the accuracy of full-field runs to a prediction that
// must answer in microseconds.
//
// Concepts:
//
//   - A Spec is the bench: gas, fibre, pulse. Its Digest names what a node
//     depends on.
//   - A Task is one full-field run; Bench.Plan lists those that a range of
//     density needs, the coarse ones first.
//   - A Node is what a run found: the lobes of its spectrum at one density and
//     energy. Each lobe gives κ = Δβ(ω), what phase matching would have needed
//     there.
//   - A Map joins the lobes of neighbouring nodes into branches, along which κ
//     is smooth, and interpolates it. Solving Δβ(ω) = κ with the exact linear
//     dispersion of the gas that is in the core now has the accuracy of
//     propagation.
//
// A Map never changes and may be shared. It refuses to extrapolate: beyond half
// a node spacing outside its nodes a branch has no answer.
package anchor
