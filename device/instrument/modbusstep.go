package instrument

import "barline/device/modbus"

// stepKeeper tells when the reply to a read could be taken for that to another.
//
// An RTU reply names unit, function and length, and nothing else. If a read of
// two registers times out and another read of two registers of the same unit
// follows, a late reply to the first answers the second; all readings are then
// shifted by one, and look good. The same happens when a converter sends a
// reply twice.
//
// So every read is remembered until the reply to a later one has come, after
// which, on a line that keeps the order of bytes, nothing older can arrive.
// Before a read that looks like a remembered one of other registers, a read is
// put in between that looks like none: its reply proves the line empty.
type stepKeeper struct {
	pending []modbus.Request // oldest first; the last may have been answered, and its reply doubled
}

const mostPending = 8

func (k *stepKeeper) reset() { k.pending = k.pending[:0] }

func (k *stepKeeper) sent(r modbus.Request) {
	if n := len(k.pending); n > 0 && same(k.pending[n-1], r) {
		return
	}
	k.pending = append(k.pending, r)
}

// answered says that a reply has come that only r can have caused.
func (k *stepKeeper) answered(r modbus.Request) {
	k.pending = append(k.pending[:0], r)
}

// refused says that an exception has come. Exceptions to different reads look
// alike, so that only the oldest read is sure to be over.
func (k *stepKeeper) refused() {
	if len(k.pending) > 1 {
		k.pending = append(k.pending[:0], k.pending[1:]...)
	}
}

// confusable reports whether a reply to r could be one to an earlier read.
func (k *stepKeeper) confusable(r modbus.Request) bool {
	for _, p := range k.pending {
		if p.Shape() == r.Shape() && p.Address != r.Address {
			return true
		}
	}
	return len(k.pending) > mostPending
}

// between returns a read of the same registers, and some behind them, that
// looks like none remembered. The unit may refuse it; that is a reply as well.
func (k *stepKeeper) between(r modbus.Request) (modbus.Request, bool) {
	if len(k.pending) > 2*mostPending {
		return r, false
	}
	for count := 1; count <= modbus.MaxRead && int(r.Address)+count <= 1<<16; count++ {
		b := r
		b.Count = count
		if b.Shape() != r.Shape() && !k.remembers(b.Shape()) {
			return b, true
		}
	}
	return r, false
}

func (k *stepKeeper) remembers(s modbus.Shape) bool {
	for _, p := range k.pending {
		if p.Shape() == s {
			return true
		}
	}
	return false
}

func same(a, b modbus.Request) bool { return a.Shape() == b.Shape() && a.Address == b.Address }
