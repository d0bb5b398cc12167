package bench

import (
	"math"
	"strings"
	"testing"
)

const loop = `
[[instrument]]
name = "loops"
protocol = "modbus-tcp"
address = "192.168.0.7:502"

[[instrument.channel]]
name = "cell A"
role = "cell-a-pressure"
unit = 1
register = 0
span = ["0 bar", "16 bar"]
resolution = "2 mbar"
gas_factor = 1.5
range = ["0 bar", "16 bar"]
`

// 4 mA is the lower and 20 mA the upper end of the range; 12 mA its middle
// (NAMUR NE 43 keeps 3.8 to 20.5 mA for measured values).
func TestCurrentLoopScale(t *testing.T) {
	sample := string(Sample())
	head, _, _ := strings.Cut(sample, "[[instrument]]")
	_, tail, _ := strings.Cut(sample, "[emission]")
	b, err := Parse([]byte(head+loop+"\n[emission]"+tail), "loop.toml")
	if err != nil {
		t.Fatal(err)
	}
	ch := b.Instrument[0].Channel[0]
	for current, want := range map[float64]float64{4: 0, 12: 8e5, 20: 16e5, 3.8: -0.2e5} {
		if got := ch.SI(current); math.Abs(got-want) > 1e-6 {
			t.Errorf("%v mA is %v Pa, want %v", current, got, want)
		}
	}
	if ch.Step != 200 || ch.GasFactor != 1.5 {
		t.Errorf("resolution %v Pa, gas factor %v; want 200, 1.5", ch.Step, ch.GasFactor)
	}
}
