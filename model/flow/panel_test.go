package flow

import (
	"errors"
	"math"
	"testing"
	"time"

	"barline/model/unit"
)

func cell(t testing.TB, name string, wallTime time.Duration) Cell {
	return Cell{Gas: gasNamed(t, name), Volume: 60e-6, Wall: room, WallTime: wallTime}
}

func at(t testing.TB, c Cell, p unit.Pascal, temperature unit.Kelvin) CellState {
	t.Helper()
	s, err := c.At(p, temperature)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

const forever = 1e6 * time.Hour // a wall that takes no heat

// An evacuated insulated vessel fills to γT₀, whatever the pressure and the
// valve: textbook thermodynamics, e.g. M.W. Zemansky & R.H. Dittman, Heat and
// Thermodynamics, 7th ed. (1997).
func TestAdiabaticFillOfVacuum(t *testing.T) {
	for _, name := range []string{"helium", "argon", "nitrogen"} {
		p := Panel{Cell: cell(t, name, forever), Inlet: Regulator{Supply: 150e5, Set: 18e5, Open: Valve{Conductance: 1e-7}},
			Needle: Valve{Conductance: 3e-11}}
		p.Gas = p.Gas.Ideal()
		_, s, err := p.TimeTo(CellState{}, 5.3e5)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name, float64(s.Temperature), p.Gas.HeatRatio*float64(room), 1e-4)
		near(t, name+" pressure", float64(p.Pressure(s)), 5.3e5, 1e-4)
		near(t, name+" formula", float64(AdiabaticFill(p.Gas, room, 0, 5.3e5)), p.Gas.HeatRatio*float64(room), 1e-12)
		// A second fill, from what is there.
		s = at(t, p.Cell, 2.385e5, room)
		_, s, err = p.TimeTo(s, 6.1e5)
		if err != nil {
			t.Fatal(err)
		}
		near(t, name+" partial", float64(s.Temperature), float64(AdiabaticFill(p.Gas, room, 2.385e5, 6.1e5)), 1e-4)
	}
}

// Sudden venting cools along the adiabat.
func TestAdiabaticVent(t *testing.T) {
	p := Panel{Cell: cell(t, "argon", forever), Vent: Valve{Conductance: 1e-9}, Ambient: 101325}
	p.Gas = p.Gas.Ideal()
	_, s, err := p.TimeTo(at(t, p.Cell, 10e5, 293), 5e5)
	if err != nil {
		t.Fatal(err)
	}
	want := 293 * math.Pow(0.5, 0.4)
	near(t, "argon", float64(s.Temperature), want, 1e-4)
	near(t, "formula", float64(AdiabaticVent(p.Gas, 293, 10e5, 5e5)), want, 1e-12)
}

// Choked filling of an isothermal cell is a straight line of p(t).
func TestChokedFillIsStraight(t *testing.T) {
	p := Panel{Cell: cell(t, "argon", 0), Inlet: Regulator{Supply: 150e5, Set: 18e5, Open: Valve{Conductance: 1e-5}}, Needle: Valve{Conductance: 1e-11}}
	p.Gas = p.Gas.Ideal()
	rate := p.Needle.MolarFlow(p.Gas, 18e5, room, 0, room) * GasConstant * float64(room) / float64(p.Volume)
	for _, target := range []unit.Pascal{1e5, 4e5, 8e5} { // 0.487 of 18 bar is 8.8
		took, _, err := p.TimeTo(CellState{}, target)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "time", took.Seconds(), float64(target)/rate, 1e-3)
	}
}

// Pumping a cell without heat to speak of: p = p_u + (p₀−p_u)·e^(−St/V).
func TestPumpDownIsExponential(t *testing.T) {
	p := Panel{Cell: cell(t, "argon", 0), Pump: Pump{Speed: 2e-5, Ultimate: 3}}
	p.Gas = p.Gas.Ideal()
	took, _, err := p.TimeTo(at(t, p.Cell, 1e5, room), 50)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "time", took.Seconds(), 3*math.Log((1e5-3)/47.0), 1e-4)
	_, _, err = p.TimeTo(at(t, p.Cell, 1e5, room), 2.9)
	if !errors.Is(err, ErrNever) {
		t.Errorf("below the ultimate pressure: %v", err)
	}
	p.Leak = 2e-4 // Pa m³/s: stands at p_u + Q/S = 13 Pa
	s, err := p.Advance(at(t, p.Cell, 1e5, room), 5*time.Minute)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ultimate with leak", float64(p.Pressure(s)), 13, 1e-3)
}

// In a shut cell nothing is lost; it cools with its time constant, and the
// pressure falls by T_wall/T: not a leak.
func TestShutCellCools(t *testing.T) {
	p := Panel{Cell: cell(t, "argon", 12*time.Second)}
	hot := at(t, p.Cell, 9e5, 320)
	s, err := p.Advance(hot, 12*time.Second)
	if err != nil {
		t.Fatal(err)
	}
	if s.Amount != hot.Amount {
		t.Errorf("a shut cell went from %v to %v mol", hot.Amount, s.Amount)
	}
	near(t, "temperature", float64(s.Temperature-room), (320-float64(room))/math.E, 1e-3)
	s, _ = p.Advance(s, 10*time.Minute)
	if p := float64(p.Pressure(s)); !(p < 9e5*float64(room)/320*1.001 && p > 9e5*float64(room)/320*0.99) {
		t.Errorf("cold pressure %v", p)
	}
	if _, _, err := p.TimeTo(s, 9.5e5); !errors.Is(err, ErrNever) {
		t.Errorf("a shut cell reaches 9.5 bar: %v", err)
	}
}

// Outgassing K/t adds K·ln(t₂/t₁) of pV.
func TestOutgassing(t *testing.T) {
	p := Panel{Cell: cell(t, "nitrogen", 0), Outgassing: 3e-4, Age: 10 * time.Minute}
	p.Gas = p.Gas.Ideal()
	s, err := p.Advance(CellState{}, 20*time.Minute)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "pressure", float64(p.Pressure(s)), 3e-4*math.Log(3)/60e-6, 1e-4)
}

// A vent as wide as a hand comes into balance with the room and stays there for
// an hour, in a moment.
func TestWideVent(t *testing.T) {
	p := Panel{Cell: cell(t, "argon", 15*time.Second), Vent: Valve{Conductance: 1e-5}, Ambient: 101325}
	s, err := p.Advance(at(t, p.Cell, 9e5, room), time.Hour)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "pressure", float64(p.Pressure(s)), 101325, 1e-6)
	near(t, "temperature", float64(s.Temperature), float64(room), 1e-6)
	took, _, err := p.TimeTo(at(t, p.Cell, 9e5, room), 101326)
	if err != nil || took > 100*time.Millisecond {
		t.Errorf("vented in %v, %v", took, err)
	}
}

func TestPanelRefuses(t *testing.T) {
	good := Panel{Cell: cell(t, "argon", 0)}
	if _, err := good.Advance(CellState{}, -1); err == nil {
		t.Error("time running backwards: accepted")
	}
	if _, err := good.Advance(CellState{Amount: math.NaN(), Temperature: room}, time.Second); err == nil {
		t.Error("NaN mol: accepted")
	}
	if _, _, err := good.TimeTo(CellState{}, -3); err == nil {
		t.Error("target below zero: accepted")
	}
	for _, c := range []Cell{{}, {Gas: good.Gas, Wall: room}, {Gas: good.Gas, Volume: 1, Wall: 0}, {Gas: good.Gas, Volume: unit.CubicMetre(math.NaN()), Wall: room}} {
		p := Panel{Cell: c}
		if _, err := p.Advance(CellState{}, time.Second); err == nil {
			t.Errorf("%v: accepted", c)
		}
	}
}
