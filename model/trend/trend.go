// Package trend keeps the history of a quantity in a fixed amount of memory:
// rings of minimum, maximum and mean at several resolutions, from seconds to
// days.
package trend

import "time"

// Bucket is a stretch of history. Count is zero where nothing was measured.
type Bucket struct {
	Start          time.Duration // bench Mono
	Min, Max, Mean float64
	Count          int
}

// View is a picture of one quantity's history, never changed after it is made.
type View struct {
	First  time.Duration // when the first value was taken, in bench Mono
	Levels []Level       // finest first
}

// Level is history at one resolution.
type Level struct {
	Width   time.Duration // of each bucket
	Buckets []Bucket      // oldest first, contiguous; gaps have Count 0
}
