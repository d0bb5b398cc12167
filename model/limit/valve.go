package limit

import (
	"fmt"

	"barline/model/unit"
)

// Valve names a valve of the gas panel.
type Valve uint8

const (
	Inlet Valve = iota
	Pump
	Vent
	CellA
	CellB
	valveCount

	// ValveCount is the number of valves, for arrays indexed by Valve.
	ValveCount = int(valveCount)
)

var valveText = [valveCount]string{"inlet", "pump", "vent", "cell A", "cell B"}

// String returns the valve's name on the panel.
func (v Valve) String() string {
	if v < valveCount {
		return valveText[v]
	}
	return fmt.Sprintf("valve %d", uint8(v))
}

// Panel is which valves stand open.
type Panel struct {
	Open [valveCount]bool
}

// ValveOrder is a movement of a valve that passed the limits.
type ValveOrder struct {
	valve Valve
	open  bool
	valid bool
}

// Order returns what to do and whether the order was made by a limit check.
func (o ValveOrder) Order() (v Valve, open, ok bool) { return o.valve, o.open, o.valid }

// Close returns the order that shuts a valve, which is always allowed.
func (l Limits) Close(v Valve) ValveOrder { return ValveOrder{v, false, v < valveCount} }

// Open returns the order that opens v, given how the panel stands and the
// highest pressure that any gauge on it shows.
func (l Limits) Open(v Valve, now Panel, highest unit.Pascal) (ValveOrder, error) {
	if v >= valveCount {
		return ValveOrder{}, fmt.Errorf("%v: %w", v, ErrLimit)
	}
	refuse := func(format string, args ...any) (ValveOrder, error) {
		return ValveOrder{}, fmt.Errorf("opening %v: %s: %w", v, fmt.Sprintf(format, args...), ErrLimit)
	}
	switch v {
	case Pump:
		if now.Open[Inlet] || now.Open[Vent] {
			return refuse("inlet or vent is open")
		}
		if !(highest < l.PumpBelow) {
			return refuse("pressure is %v, the pump takes less than %v", highest, l.PumpBelow)
		}
	case Inlet:
		if now.Open[Pump] || now.Open[Vent] {
			return refuse("pump or vent is open")
		}
		if low := l.Lowest(); !(highest < low.Max) {
			return refuse("pressure is %v, %s allows %v", highest, low.Part, low.Max)
		}
	case Vent:
		if now.Open[Pump] || now.Open[Inlet] {
			return refuse("pump or inlet is open")
		}
	}
	return ValveOrder{v, true, true}, nil
}
