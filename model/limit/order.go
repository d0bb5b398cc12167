package limit

// Order is something for one instrument to do besides a setpoint: a
// ValveOrder, an EnergyOrder or a ZeroShift.
type Order interface{ order() }

func (ValveOrder) order()  {}
func (EnergyOrder) order() {}
func (ZeroShift) order()   {}
