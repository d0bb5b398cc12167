package live

import (
	"strings"
	"testing"

	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

func TestOrdersAsPeopleWriteThem(t *testing.T) {
	for text, want := range map[string]Intent{
		"open inlet":               MoveValve{limit.Inlet, true},
		" Shut  VENT ":             MoveValve{limit.Vent, false},
		"close pump":               MoveValve{limit.Pump, false},
		"energy 1.2 uJ":            Attenuate{1.2 * unit.Microjoule},
		"zero cell A at 1.013 bar": ZeroGauge{reading.CellAPressure, 101300},
		"zero manifold at 0 bar":   ZeroGauge{reading.ManifoldPressure, 0},
	} {
		got, err := ParseOrder(text)
		if err != nil {
			t.Errorf("%q: %v", text, err)
			continue
		}
		if a, ok := got.(Attenuate); ok {
			got = Attenuate{unit.Joule(float32(a.Energy))}
			want = Attenuate{unit.Joule(float32(want.(Attenuate).Energy))}
		}
		if got != want {
			t.Errorf("%q: %#v, want %#v", text, got, want)
		}
	}
	for text, want := range map[string]string{
		"":                     "expected \"open inlet\"",
		"open sesame":          "expected inlet, pump or vent",
		"energy 1.2":           "unit",
		"zero":                 "expected cell A",
		"zero cell A":          "expected cell A",
		"zero fibre at 1 bar":  "expected cell A",
		"zero cell A at a bar": "bar",
	} {
		if got, err := ParseOrder(text); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v, %v; want an error that says %q", text, got, err, want)
		}
	}
}
