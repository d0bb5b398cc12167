//go:build linux

package instrument

import (
	"testing"
	"time"

	"barline/device/link"
	"barline/device/modbus"
	"barline/model/bench"
	"barline/model/reading"
)

// BenchmarkTransaction reads one register pair over a pseudo-terminal, as
// fast as the silent interval allows: 1.75 ms at this speed. What an operation
// takes beyond it is overhead, ours and that of the far end in this process.
//
//	go test -run xxx -bench Transaction ./device/instrument
func BenchmarkTransaction(b *testing.B) {
	registers := map[byte]map[uint16]uint16{1: {}}
	put(b, registers[1], 0, 2.385)
	answer := units(b, registers)
	s := newSocket(b, answer)
	s.plug()
	spec := bench.Instrument{Name: "g", Protocol: bench.ModbusRTU, Port: s.name, Baud: 115200, Parity: "none",
		Channel: []bench.Channel{pressure("A", reading.CellAPressure, 1, 0)}}
	opener, err := link.NewOpener(spec)
	if err != nil {
		b.Fatal(err)
	}
	line, err := opener.Open(b.Context())
	if err != nil {
		b.Fatal(err)
	}
	defer line.Close()
	in := build(b, spec)
	now := clockOf(time.Millisecond)
	var dst []reading.Reading
	for b.Loop() {
		if dst, err = in.Poll(line, now, dst[:0]); err != nil || dst[0].Status != reading.Good {
			b.Fatalf("%+v, %v", dst, err)
		}
	}
	perOp := b.Elapsed() / time.Duration(b.N)
	b.ReportMetric(float64((perOp - modbus.Silence(115200, 10)).Microseconds()), "us-over-silence")
}
