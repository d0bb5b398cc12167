package simulate

import "barline/device/modbus"

// laser is what stands in the beam before the fibre: an attenuator that turns
// to where it is told, and a shutter that tells whether it is open. Both are
// unit 4 on the line of the gauges:
//
//	function 3, register 0    shutter: 1 open, 0 shut
//	function 3, register 1    attenuator: thousandths of the full energy
//	function 6, register 1    the same, to be set, 0 to 1000
type laser struct {
	target float64 // share let through, 0 … 1
	share  float64
}

// halfWay is where the attenuator stands at the start: the stated energy is
// half of what it can let through.
const halfWay = 0.5

// attenuatorRate is how fast it turns, share per second.
const attenuatorRate = 2.0

func newLaser() laser { return laser{halfWay, halfWay} }

// move turns the attenuator over one frame.
func (l *laser) move() {
	step := attenuatorRate * frameSec
	l.share += min(max(l.target-l.share, -step), step)
}

// answer answers a request to unit 4.
func (b *Bench) laserAnswers(r modbus.Request) modbus.Reply {
	reply := modbus.Reply{Unit: r.Unit, Function: r.Function}
	shutter := uint16(1)
	if b.faults.shutter {
		shutter = 0
	}
	registers := []uint16{shutter, uint16(1000*b.laser.share + 0.5)}
	switch r.Function {
	case modbus.ReadHolding:
		from, to := int(r.Address), int(r.Address)+r.Count
		if to > len(registers) {
			reply.Exception = modbus.IllegalAddress
			break
		}
		reply.Values = registers[from:to]
	case modbus.WriteSingle:
		switch {
		case r.Address != 1:
			reply.Exception = modbus.IllegalAddress
		case r.Values[0] > 1000:
			reply.Exception = modbus.IllegalValue
		default:
			b.laser.target = float64(r.Values[0]) / 1000
			reply.Address, reply.Values = r.Address, r.Values
		}
	default:
		reply.Exception = modbus.IllegalFunction
	}
	return reply
}
