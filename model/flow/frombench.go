package flow

import (
	"time"

	"barline/model/bench"
	"barline/model/unit"
)

// BenchFibre returns the core of a bench and its hollow cladding, for NewFibre
// or NewCore, at temperature t.
func BenchFibre(b *bench.Bench, t unit.Kelvin) (Spec, []Cladding, error) {
	m, err := benchGas(b)
	if err != nil {
		return Spec{}, nil, err
	}
	core := Spec{Radius: b.Fibre.CoreDiameter / 2, Length: b.Fibre.Length, Gas: m, Temperature: t}
	if b.Fibre.CladdingHoles == 0 {
		return core, nil, nil
	}
	return core, []Cladding{{Radius: b.Fibre.CladdingHoleDiameter / 2, Holes: b.Fibre.CladdingHoles}}, nil
}

// BenchHandling returns how the panel of a bench moves gas, both cells and the
// line as one volume with walls at t, within the limits of the bench.
func BenchHandling(b *bench.Bench, t unit.Kelvin) (Handling, error) {
	m, err := benchGas(b)
	if err != nil {
		return Handling{}, err
	}
	p, l := b.Panel, b.Limits
	return Handling{
		Panel: Panel{
			Cell: Cell{Gas: m, Volume: 2*p.CellVolume + p.LineVolume, Wall: t, WallTime: time.Duration(float64(p.WallTime) * 1e9)},
			// What stands behind the needle is the regulator's outlet: the
			// regulator itself counts as wide.
			Inlet:   Regulator{Supply: p.Supply, Set: p.Supply, Open: Valve{Conductance: 1e3 * float64(p.Inlet)}},
			Needle:  Valve{Conductance: float64(p.Inlet)},
			Vent:    Valve{Conductance: float64(p.Vent)},
			Ambient: p.Ambient,
			Pump:    Pump{Speed: float64(p.PumpSpeed), Ultimate: p.PumpUltimate},
		},
		Rise: l.RiseRate, Fall: l.FallRate, PumpBelow: l.PumpBelow,
	}, nil
}

func benchGas(b *bench.Bench) (Medium, error) {
	m, err := Named(b.Gas.Species)
	if b.Gas.Density == "ideal" {
		m = m.Ideal()
	}
	return m, err
}
