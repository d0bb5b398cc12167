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

const whole = `
[[instrument]]
name = "spectrometer"
protocol = "lines"
address = "192.168.0.8:4000"
pattern = "SP {counts...}"
calibration = ["190 nm", "0.4 nm", "-1e-5 nm"]
dark = 120
threshold = 50.5
saturation = 65535

[[instrument.channel]]
name = "emission"
role = "emission"
field = "counts"
scale = "1 nm"
`

func TestWholeSpectrum(t *testing.T) {
	sample := string(Sample())
	head, _, _ := strings.Cut(sample, "[[instrument]]")
	_, tail, _ := strings.Cut(sample, "[emission]")
	b, err := Parse([]byte(head+whole+"\n[emission]"+tail), "whole.toml")
	if err != nil {
		t.Fatal(err)
	}
	if in := b.Instrument[0]; in.Threshold != 50.5 || in.Dark != 120 || len(in.Calibration) != 3 {
		t.Errorf("%+v", in)
	}
	for _, wrong := range []string{`["190 nm"]`, `["190 nm", "0.4"]`, `["190 nm", "0.4 bar"]`} {
		text := strings.Replace(whole, `["190 nm", "0.4 nm", "-1e-5 nm"]`, wrong, 1)
		if _, err := Parse([]byte(head+text+"\n[emission]"+tail), "whole.toml"); err == nil || !strings.Contains(err.Error(), "calibration") {
			t.Errorf("calibration = %s: %v", wrong, err)
		}
	}
}

func TestCurrentInMicroamps(t *testing.T) {
	sample := string(Sample())
	head, _, _ := strings.Cut(sample, "[[instrument]]")
	_, tail, _ := strings.Cut(sample, "[emission]")
	text := strings.Replace(loop, "span =", "current = \"1 uA\"\nspan =", 1)
	b, err := Parse([]byte(head+text+"\n[emission]"+tail), "loop.toml")
	if err != nil {
		t.Fatal(err)
	}
	ch := b.Instrument[0].Channel[0]
	if got := ch.SI(12000); math.Abs(got-8e5) > 1e-6 || ch.Milliamp != 1e-3 {
		t.Errorf("12000 uA is %v Pa, %v mA a count; want 8 bar", got, ch.Milliamp)
	}
	text = strings.Replace(loop, "span =", "current = \"1 V\"\nspan =", 1)
	if _, err := Parse([]byte(head+text+"\n[emission]"+tail), "loop.toml"); err == nil || !strings.Contains(err.Error(), "expected a current") {
		t.Errorf("a voltage: %v", err)
	}
}

// Gauges of different range may share a role; twins may not.
func TestGaugesThatShareARole(t *testing.T) {
	sample := string(Sample())
	head, _, _ := strings.Cut(sample, "[[instrument]]")
	_, tail, _ := strings.Cut(sample, "[emission]")
	second := `
[[instrument.channel]]
name = "fine"
role = "cell-a-pressure"
unit = 2
register = 0
scale = "1 mbar"
range = ["0 bar", "1 bar"]
`
	if _, err := Parse([]byte(head+loop+second+"\n[emission]"+tail), "two.toml"); err != nil {
		t.Error(err)
	}
	twin := strings.Replace(second, `"1 bar"]`, `"16 bar"]`, 1)
	if _, err := Parse([]byte(head+loop+twin+"\n[emission]"+tail), "two.toml"); err == nil || !strings.Contains(err.Error(), "has this role already") {
		t.Errorf("twins: %v", err)
	}
}
