// Package drift tells a change from scatter.
//
// Readings of a bench are correlated in time, so a control chart of single
// readings would cry wolf: the run lengths in the tables hold for independent
// values. Learn therefore takes a quiet stretch and finds its scatter and its
// correlation time; a Chart then judges means of groups that are several
// correlation times long, by an exponentially weighted moving average (slow,
// small drifts) and by cumulative sums (sudden steps, with the time of change).
// The limits are set from how often a false alarm may come.
//
// Allan, AllanOverlapping and AllanModified say over which time averaging
// still helps, and Individuals draws limits where nothing was learnt yet.
//
// Attribute weighs what may have caused a shift: each Cause by how usual the
// amount is that it would need, and by what else it would have moved. Best
// ranks what to do next by what it would tell.
//
// The package refuses to learn from a stretch that is too short, that runs
// away, or whose correlation is as long as the stretch itself. Readings that
// are not usable must not be given to it: a closed shutter is no drift.
package drift
