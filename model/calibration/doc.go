// Package calibration fits the anchored prediction of a bench to emission that
// was measured on it.
//
// A Model answers for the emission at measured inputs and at Corrections: by
// how much index, core, energy and the rest differ from what the bench file
// says. Fit finds the corrections from points, weighs them against what was
// known before, and returns a Calibration, which keeps the range it was made
// in, its uncertainty, and which corrections the data could not tell apart.
//
// Like is compared with like: the anchored answer knows centroids, so peaks
// are refused. Points that are not usable, outside the nodes, or further than
// 20 nm from every branch are set aside and named. The estimate is never
// calibrated: it is a start value, and would hide its own error in the
// corrections.
package calibration
