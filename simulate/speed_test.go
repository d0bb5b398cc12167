package simulate

import (
	"testing"
	"time"

	"barline/device/modbus"
)

// BenchmarkSecond is one second of bench time with three instruments polled as
// the bench file has them: 10 polls of three units, 4 polls of the controller,
// 5 lines of the spectrometer. Times faster than life: 1e9 / (ns/op).
func BenchmarkSecond(b *testing.B) {
	for _, c := range []struct {
		name string
		to   string
	}{{"held", ""}, {"controlled", "SOUR:PRES:LEV 9\n"}, {"filling", "SOUR:PRES:LEV 15\n"}} {
		b.Run(c.name, func(b *testing.B) {
			bench := newBench(b, Options{Seed: 1, Scenario: "quiet"})
			l := bench.Lines()
			ask(b, l["controller"], []byte(c.to))
			at := time.Duration(0)
			b.ReportAllocs()
			for b.Loop() {
				if c.name == "filling" {
					ask(b, l["controller"], []byte("SOUR:PRES:LEV "+fixed(7+0.2*float64(at/time.Second%40), 2)+"\n"))
				}
				second(b, bench, l, at)
				at += time.Second
			}
			b.ReportMetric(float64(time.Second)/(float64(b.Elapsed())/float64(b.N)), "×life")
		})
	}
}

// second polls the instruments over a second that begins at at.
func second(t testing.TB, b *Bench, l map[string]*Line, at time.Duration) {
	t.Helper()
	buf := make([]byte, 512)
	for tenth := range 10 {
		to(t, b, at+time.Duration(tenth+1)*100*time.Millisecond)
		for unit, f := range map[byte]modbus.Function{1: modbus.ReadInput, 2: modbus.ReadInput, 3: modbus.ReadHolding} {
			r := modbus.Request{Unit: unit, Function: f, Count: 2}
			if unit == 3 {
				r.Address = 16
			}
			frame, err := modbus.AppendRequestRTU(nil, r)
			if err != nil {
				t.Fatal(err)
			}
			if _, err := l["gauges"].Write(frame); err != nil {
				t.Fatal(err)
			}
			if n, err := l["gauges"].Read(buf, 0); err != nil || n != 9 {
				t.Fatal(n, err)
			}
		}
		if tenth%5 == 0 || tenth%5 == 2 {
			if _, err := l["controller"].Write([]byte("SOUR:PRES:LEV?\nMEAS:PRES?\n")); err != nil {
				t.Fatal(err)
			}
			if _, err := l["controller"].Read(buf, 0); err != nil {
				t.Fatal(err)
			}
		}
		if tenth%2 == 1 {
			if _, err := l["spectrometer"].Read(buf, 0); err != nil {
				t.Fatal(err)
			}
		}
	}
}
