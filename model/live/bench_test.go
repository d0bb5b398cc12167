package live

import (
	"testing"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// BenchmarkTick is a tick of 50 ms with both gauges read, the prediction left
// out: what the core itself costs twenty times a second.
func BenchmarkTick(b *testing.B) {
	core, s, err := New(testBench(), straight{})
	if err != nil {
		b.Fatal(err)
	}
	var fx []Effect
	at := reading.Stamp{UTC: time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC)}
	gauge := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Status: reading.Good}
	b.ReportAllocs()
	for i := range b.N {
		at.Mono += 50 * time.Millisecond
		gauge.Taken = at
		gauge.Value = float64(5*unit.Bar) + 1000*float64(i%20)
		fx = core.Step(&s, Read{gauge}, fx[:0])
		fx = core.Step(&s, Tick{At: at}, fx[:0])
	}
}

// BenchmarkRead is a reading of a streaming channel.
func BenchmarkRead(b *testing.B) {
	core, s, err := New(testBench(), straight{})
	if err != nil {
		b.Fatal(err)
	}
	var fx []Effect
	r := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Status: reading.Good, Value: 5e5}
	var e Event = Read{r}
	b.ReportAllocs()
	for range b.N {
		fx = core.Step(&s, e, fx[:0])
	}
}
