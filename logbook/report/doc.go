// Package report draws a stretch of a logbook as one HTML file that needs
// nothing else: pressure, emission over pressure, residual, steps, alarms,
// notes, calibration, configuration, and the digests of the segments that it
// was drawn from. It can be printed, and read ten years from now.
//
// Memory is bounded by the width of the charts and by the numbers of steps,
// alarms and notes, not by the number of records. A chart shows the least and
// the greatest value of every column, so that a spike is never lost between
// two points; where nothing was recorded it shows a gap.
package report
