package simulate

import (
	"barline/device/modbus"
	"barline/model/unit"
)

// gauges is the line with two transducers, a thermometer and what stands in the
// beam, each a unit:
//
//	unit 1  transducer of cell A   function 4, registers 0–1: pressure in bar
//	unit 2  transducer of cell B   function 4, registers 0–1: pressure in bar
//	unit 3  thermometer            function 3, registers 16–17: fibre in °C,
//	                               registers 18–19: room in °C
//	unit 4  shutter and attenuator, see laser
//
// as IEEE 754 single, the transducers with the high word first, the thermometer
// with the low word first. Any other register is exception 02, any other
// function exception 01; a unit that is not there does not answer.
type gauges struct{}

func (*gauges) take(b *Bench, in []byte) (rest, out []byte) {
	size := modbus.RequestSizeRTU(in)
	switch {
	case size < 0: // not for us, or out of step: wait for silence
		return nil, nil
	case size == 0 || len(in) < size:
		return in, nil
	}
	r, err := modbus.DecodeRequestRTU(in[:size])
	if err != nil {
		return nil, nil
	}
	rest = in[size:]
	reply, answers := b.registers(r)
	if !answers {
		return rest, nil
	}
	out, err = modbus.AppendReplyRTU(nil, reply)
	if err != nil {
		return rest, nil
	}
	return rest, out
}

// registers answers a request, or not.
func (b *Bench) registers(r modbus.Request) (modbus.Reply, bool) {
	reply := modbus.Reply{Unit: r.Unit, Function: r.Function}
	var (
		where    string
		function = modbus.ReadInput
		first    = uint16(0)
		order    = modbus.ABCD
		values   []float64
	)
	switch r.Unit {
	case 1:
		where = "cell A"
		values = []float64{unit.Pascal(b.gaugeA.read(b.noise, b.frame)).Bar()}
	case 2:
		where = "cell B"
		values = []float64{unit.Pascal(b.gaugeB.read(b.noise, b.frame)).Bar()}
	case 3:
		where, function, first, order = "fibre", modbus.ReadHolding, 16, modbus.CDAB
		values = []float64{
			unit.Kelvin(b.fibreT.read(b.noise, b.frame)).Celsius(),
			unit.Kelvin(b.roomT.read(b.noise, b.frame)).Celsius(),
		}
	case 4:
		return b.laserAnswers(r), true
	default:
		return reply, false
	}
	if b.faults.dead[where] {
		return reply, false
	}
	if r.Function != function {
		reply.Exception = modbus.IllegalFunction
		return reply, true
	}
	var all []uint16
	for _, v := range values {
		var err error
		if all, err = modbus.Float32.Encode(all, order, v); err != nil {
			reply.Exception = modbus.DeviceFailure
			return reply, true
		}
	}
	from, to := int(r.Address)-int(first), int(r.Address)-int(first)+r.Count
	if from < 0 || to > len(all) {
		reply.Exception = modbus.IllegalAddress
		return reply, true
	}
	reply.Values = all[from:to]
	return reply, true
}
