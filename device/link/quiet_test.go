//go:build unix

package link

import (
	"io"
	"testing"
	"time"

	"barline/device/modbus"
	"barline/model/bench"
)

// Before each message the line keeps the silence that the protocol or the
// converter wants, counted from the last byte of either direction.
func TestSilenceBeforeAMessage(t *testing.T) {
	for _, c := range []struct {
		name string
		spec bench.Instrument
		want time.Duration
	}{
		// 3.5 characters of 11 bits: MODBUS over Serial Line V1.02, 2.5.1.1.
		{"modbus at 1200 baud", bench.Instrument{Protocol: "modbus-rtu", Baud: 1200, Parity: "even"}, 32083 * time.Microsecond},
		{"modbus at 115200 baud", bench.Instrument{Protocol: "modbus-rtu", Baud: 115200, Parity: "even"}, 1750 * time.Microsecond},
		{"turnaround", bench.Instrument{Protocol: "modbus-rtu", Baud: 115200, Turnaround: 0.02}, 20 * time.Millisecond},
		{"scpi", bench.Instrument{Protocol: "scpi"}, 0},
	} {
		far, name := openPTY(t)
		c.spec.Name, c.spec.Port = "x", name
		line := open(t, c.spec)
		buf := make([]byte, 8)
		for range 3 {
			if _, err := io.WriteString(far, "reply"); err != nil {
				t.Fatal(err)
			}
			if _, err := line.Read(buf, time.Second); err != nil {
				t.Fatal(err)
			}
			begin := time.Now()
			if _, err := line.Write([]byte("ask")); err != nil {
				t.Fatal(err)
			}
			// The read may have ended a moment before begin was taken.
			if took := time.Since(begin); took < c.want-200*time.Microsecond {
				t.Errorf("%s: sent after %v, want %v of silence", c.name, took, c.want)
			}
			if _, err := io.ReadFull(far, buf[:3]); err != nil {
				t.Fatal(err)
			}
		}
	}
	if got := modbus.Silence(1200, 11); (got - 32083*time.Microsecond).Abs() > time.Microsecond {
		t.Errorf("silence of %v", got)
	}
}
