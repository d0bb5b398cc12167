package fibre

import (
	"testing"

	"barline/model/gas"
)

func BenchmarkAt(b *testing.B) {
	for _, s := range []Spec{thick, thin, {Kind: Kagome, CoreDiameter: 29.6e-6, Wall: 250e-9, Length: 0.3}} {
		f, err := New(s)
		if err != nil {
			b.Fatal(err)
		}
		m, err := gas.New(gas.Spec{Composition: "argon"})
		if err != nil {
			b.Fatal(err)
		}
		state, err := m.At(9e5, 293.15, 0)
		if err != nil {
			b.Fatal(err)
		}
		g := Guide{f, state}
		b.Run(s.Kind.String(), func(b *testing.B) {
			b.ReportAllocs()
			omega := Frequency(260e-9)
			for b.Loop() {
				g.At(omega)
			}
		})
	}
}
