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
// So every read is remembered until a reply to a later one has come, after
// which, on a line that keeps the order of bytes, nothing older can arrive.
// Before a read that looks like a remembered one of other registers, a read is
// put in between that looks like none of them: its reply proves the line empty.
type stepKeeper struct {
	pending []modbus.Request // oldest first; the last may have been answered, and its reply doubled
}

// mostPending bounds what is remembered. Each entry but the last has cost a
// timeout, so that one which is forgotten is many seconds old.
const mostPending = 32

func (k *stepKeeper) reset() { k.pending = k.pending[:0] }

func (k *stepKeeper) sent(r modbus.Request) {
	if n := len(k.pending); n > 0 && same(k.pending[n-1], r) {
		return
	}
	if len(k.pending) == mostPending {
		k.drop(mostPending / 2)
	}
	k.pending = append(k.pending, r)
}

// answered says that a reply to r has come. It may be that to an earlier r, so
// that only what was sent before the first r is over.
func (k *stepKeeper) answered(r modbus.Request) {
	for i, p := range k.pending {
		if same(p, r) {
			k.drop(i)
			return
		}
	}
}

// refused says that an exception has come. Exceptions to different reads look
// alike, so that only the oldest read is sure to be over.
func (k *stepKeeper) refused() {
	if len(k.pending) > 1 {
		k.drop(1)
	}
}

func (k *stepKeeper) drop(n int) { k.pending = append(k.pending[:0], k.pending[n:]...) }

// confusable reports whether a reply to r could be one to an earlier read.
func (k *stepKeeper) confusable(r modbus.Request) bool {
	for _, p := range k.pending {
		if p.Shape() == r.Shape() && p.Address != r.Address {
			return true
		}
	}
	return false
}

// between returns a read of the unit of r whose reply cannot be confused with
// that to r or to one remembered: one that was sent before and is of a shape
// of its own, else the registers of r and some behind them. The unit may
// refuse it; that is a reply as well.
func (k *stepKeeper) between(r modbus.Request) (b modbus.Request, ok bool) {
	for _, p := range k.pending {
		if p.Unit == r.Unit && p.Function == r.Function && p.Count != r.Count && !k.confusable(p) {
			return p, true
		}
	}
	b = r
	for b.Count = 1; b.Count <= modbus.MaxRead && int(r.Address)+b.Count <= 1<<16; b.Count++ {
		if b.Count != r.Count && !k.confusable(b) {
			return b, true
		}
	}
	return r, false
}

func same(a, b modbus.Request) bool { return a.Shape() == b.Shape() && a.Address == b.Address }
