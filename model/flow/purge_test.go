package flow

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"barline/model/unit"
)

// Worked examples of inerting by pressure and vacuum swing, as engineering
// handbooks give them with the formulas of CEN/TR 15281:2022, annex A.
func TestPurgeExamples(t *testing.T) {
	// 21 % oxygen, pressurised from 1 to 5 atm twice: 0.84 %.
	p := Purge{Start: 0.21, Low: unit.Atmosphere, High: 5 * unit.Atmosphere}
	near(t, "two cycles", float64(p.After(2)), 0.0084, 1e-9)
	// Evacuated to 0.5 atm, below 1 %: 5 cycles (4.4 by the formula).
	p = Purge{Start: 0.21, Low: 0.5 * unit.Atmosphere, High: unit.Atmosphere}
	if n, err := p.Cycles(0.01); n != 5 || err != nil {
		t.Errorf("half an atmosphere: %d cycles, %v, want 5", n, err)
	}
	// Evacuated to 6 mmHg, to 5 ppm: 3 cycles (2.2).
	p.Low = unit.Atmosphere * 6 / 760
	if n, err := p.Cycles(5e-6); n != 3 || err != nil {
		t.Errorf("6 mmHg: %d cycles, %v, want 3", n, err)
	}
	// 1 mbar to 5 bar, three cycles: (2e-4)³ = 8e-12 of what was there.
	p = Purge{Start: 1, Low: unit.Millibar, High: 5 * unit.Bar}
	near(t, "bench", float64(p.After(3)), 8e-12, 1e-9)
}

// Counting cycle by cycle, with impure gas and air that comes in.
func TestPurgeFloor(t *testing.T) {
	p := Purge{Start: 1, Cylinder: 10e-6, Low: 2 * unit.Millibar, High: 3 * unit.Bar, PerCycle: 4e-6}
	x := 1.0
	for n := 1; n <= 6; n++ {
		r := float64(p.Low / p.High)
		x = x*r + float64(p.Cylinder)*(1-r) + float64(p.PerCycle)
		near(t, "cycle by cycle", float64(p.After(n)), x, 1e-9)
	}
	n, err := p.Cycles(20e-6)
	if err != nil || float64(p.After(n)) > 20e-6 || float64(p.After(n-1)) <= 20e-6 {
		t.Errorf("%d cycles leave %v, one less %v, %v", n, p.After(n), p.After(n-1), err)
	}
	if _, err := p.Cycles(13e-6); !errors.Is(err, ErrRange) || !strings.Contains(err.Error(), "14 ppm") {
		t.Errorf("below the floor of 14 ppm: %v", err)
	}
	if n, err := p.Cycles(1); n != 0 || err != nil {
		t.Errorf("pure enough: %d, %v", n, err)
	}
	for _, bad := range []Purge{{Start: 1, Low: 2, High: 1}, {Start: 1, Low: -1, High: 1}, {Start: 2, High: 1}, {Start: unit.Fraction(math.NaN()), High: 1}} {
		if _, err := bad.Cycles(0.1); err == nil {
			t.Errorf("%+v: accepted", bad)
		}
	}
}

func TestRelaxation(t *testing.T) {
	// Far below a microbar: L²/(π²D), D = (2/3)·a·v̄ by Knudsen.
	s := Spec{Radius: 15e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: 293}
	v := math.Sqrt(8 * GasConstant * 293 / (math.Pi * s.Gas.MolarMass))
	tau, err := s.Relaxation(1e-4)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "molecular", tau.Seconds(), 0.09/(math.Pi*math.Pi*10e-6*v), 2e-3)
	// Far above: D = a²p/8η, here with slip below 1e-3.
	s.Radius, s.Gas = 200e-6, s.Gas.Ideal()
	tau, _ = s.Relaxation(9e5)
	near(t, "viscous", tau.Seconds(), 0.09*8*s.Gas.Viscosity(293)/(math.Pi*math.Pi*4e-8*9e5), 2e-3)
	if _, err := s.Relaxation(-1); err == nil {
		t.Error("negative pressure: accepted")
	}
}

// With valves known and rates free, Move agrees with the isothermal panel
// carried in time; with rates it is a ramp.
func TestMove(t *testing.T) {
	panel := Panel{Cell: cell(t, "argon", 0), Inlet: Regulator{Supply: 150e5, Set: 18e5, Band: 1e5, Open: Valve{Conductance: 1e-8}},
		Needle: Valve{Conductance: 2e-11}, Ambient: 101325, Vent: Valve{Conductance: 4e-11}, Pump: Pump{Speed: 3e-5, Ultimate: 1}}
	h := Handling{Panel: panel, PumpBelow: 1.2e5}
	up, err := h.Move(0, 11e5)
	if err != nil {
		t.Fatal(err)
	}
	filling := panel
	filling.Vent, filling.Pump = Valve{}, Pump{}
	took, s, err := filling.TimeTo(CellState{}, 11e5)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "fill", up.Time.Seconds(), took.Seconds(), 2e-3)
	near(t, "gas", up.Gas, s.Amount, 1e-4)

	down, err := h.Move(1.1e5, 20)
	if err != nil {
		t.Fatal(err)
	}
	pumping := panel
	pumping.Vent, pumping.Needle = Valve{}, Valve{}
	took, _, err = pumping.TimeTo(at(t, panel.Cell, 1.1e5, room), 20)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "pump", down.Time.Seconds(), took.Seconds(), 2e-3)
	if down.Gas != 0 {
		t.Errorf("pumping took %v mol from the cylinder", down.Gas)
	}
	if _, err := h.Move(1e5, 0.5); !errors.Is(err, ErrNever) {
		t.Errorf("below the ultimate pressure: %v", err)
	}

	ramp := Handling{Panel: Panel{Cell: panel.Cell}, Rise: 0.2e5, Fall: 0.1e5}
	up, err = ramp.Move(1e5, 9e5)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ramp up", up.Time.Seconds(), 40, 1e-9)
	down, _ = ramp.Move(9e5, 1e5)
	near(t, "ramp down", down.Time.Seconds(), 80, 1e-9)
	if _, err := (Handling{Panel: Panel{Cell: panel.Cell}}).Move(1e5, 2e5); err == nil {
		t.Error("no valve and no rate: accepted")
	}
}

func TestPlanPurge(t *testing.T) {
	h := Handling{Panel: Panel{Cell: cell(t, "argon", 0)}, Rise: 0.2e5, Fall: 0.2e5}
	p := Purge{Start: 1, Cylinder: 10e-6, Low: 5 * unit.Millibar, High: 3 * unit.Bar}
	core := Spec{Radius: 17e-6, Length: 0.3, Gas: h.Gas, Temperature: room}
	plan, err := PlanPurge(h, p, unit.Atmosphere, 50e-6, core)
	if err != nil {
		t.Fatal(err)
	}
	if plan.Cycles != 2 {
		t.Errorf("%d cycles, want 2", plan.Cycles)
	}
	tau, _ := core.Relaxation(p.Low)
	if plan.Hold != 3*tau {
		t.Errorf("hold %v, want three times %v", plan.Hold, tau)
	}
	// Two fills of 60 cm³ from 5 mbar to 3 bar: about 2·0.06 L·2.995 bar.
	near(t, "norm litres", NormLitres(plan.Gas), 2*0.06*2.995e5/101325*273.15/float64(room), 3e-3)
	want := plan.First.Time + 2*plan.Hold + 2*plan.Up.Time + plan.Down.Time
	if plan.Total != want || plan.Total < time.Minute/2 {
		t.Errorf("total %v, want %v", plan.Total, want)
	}
	if plan.Reached > 50e-6 || plan.Floor != p.Floor() {
		t.Errorf("reached %v, floor %v", plan.Reached, plan.Floor)
	}
	if _, err := PlanPurge(h, p, unit.Atmosphere, 1e-6, core); err == nil {
		t.Error("purer than the cylinder: accepted")
	}
}
