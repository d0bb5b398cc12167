package simulate

import (
	"testing"
	"time"
)

// Whatever bytes come, in whatever pieces, no instrument falls over, and each
// answers the next good request after a silence.
func FuzzWire(f *testing.F) {
	for _, seed := range [][]byte{
		{1, 4, 0, 0, 0, 2, 0x71, 0xCB},
		{3, 3, 0, 16, 0, 2, 0xC4, 0x2C},
		[]byte("SOUR:PRES:LEV 3.5;LEV?\n"),
		[]byte("OUTP:CELLA OFF\n:SYST:ERR?;*IDN?\r\n"),
		[]byte("\n;;\n*\n\x00"),
	} {
		f.Add(seed, uint8(3))
	}
	f.Fuzz(func(t *testing.T, bytes []byte, cut uint8) {
		b := newBench(t, Options{Seed: 1})
		for name, l := range b.Lines() {
			at := min(int(cut), len(bytes))
			ask(t, l, bytes[:at])
			ask(t, l, bytes[at:])
			to(t, b, b.Now()+time.Second)
			if name == "controller" {
				ask(t, l, []byte("\n"))
				if got := string(ask(t, l, []byte("*IDN?\n"))); got != identity+"\n" {
					t.Fatalf("behind %q: %q", bytes, got)
				}
			}
			if name == "gauges" {
				cellA(t, b.Lines())
			}
		}
	})
}
