package limit

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// ZeroShift is what is added to all that a gauge reads from now on, instead of
// what was added before. Only Limits.Zero makes a valid one; the zero value is
// not.
type ZeroShift struct {
	channel string
	shift   unit.Pascal
	valid   bool
}

// Shift returns the channel of the gauge and what is to be added to its
// readings. ok is false for one that no limit made.
func (z ZeroShift) Shift() (channel string, shift unit.Pascal, ok bool) {
	return z.channel, z.shift, z.valid
}

// Zero returns the correction of a gauge that reads what it reads, with shift
// added already, at a pressure that is known to be is. All that is ever added
// is at most MostZero: a gauge that is further off wants care, not a number.
func (l Limits) Zero(channel string, reads, is, shift unit.Pascal) (ZeroShift, error) {
	total := shift + is - reads
	if !(math.Abs(float64(total)) <= float64(l.MostZero)) {
		return ZeroShift{}, fmt.Errorf("zero of %s: %v would be added to what it reads, at most %v may be: %w", channel, total, l.MostZero, ErrLimit)
	}
	if channel == "" {
		return ZeroShift{}, fmt.Errorf("zero of a gauge without a name: %w", ErrLimit)
	}
	return ZeroShift{channel, total, true}, nil
}
