package flow

import (
	"math"
	"testing"
	"time"

	"barline/model/unit"
)

func TestCladdingLags(t *testing.T) {
	spec := Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room, Cells: 64}
	f, err := NewFibre(spec, Cladding{Radius: 6e-6, Holes: 7}, Cladding{Radius: 2e-6, Holes: 40})
	if err != nil {
		t.Fatal(err)
	}
	if err := f.Fill(7e5, 7e5, room); err != nil {
		t.Fatal(err)
	}
	if err := f.Advance(0, 9e5, 9e5, room); err != nil {
		t.Fatal(err)
	}
	all, ok := f.TimeToSettle(100)
	own, _ := f.Core.TimeToSettle(100)
	// (17/2)² = 72, less what slip gives the fine holes.
	if ratio := float64(all) / float64(own); !ok || ratio < 50 || ratio > 72 {
		t.Errorf("fibre settles in %v, core in %v", all, own)
	}
	if err := f.Advance(30*time.Millisecond, 9e5, 9e5, room); err != nil {
		t.Fatal(err)
	}
	// A viscous channel fills as 1/a²: core, then the wide holes, then the rest.
	core, wide, fine := f.Core.Lag(), f.Cladding[0].Lag(), f.Cladding[1].Lag()
	if !(core < wide && wide < fine && core > 0) {
		t.Errorf("lags %v, %v, %v: want them to grow", core, wide, fine)
	}
	near(t, "difference", float64(f.Differential(0.15)), float64(f.Core.At(0.15)-f.Cladding[1].At(0.15)), 1e-12)
	a, b := f.Entered()
	gained := f.Amount()
	if err := f.Fill(7e5, 7e5, room); err != nil {
		t.Fatal(err)
	}
	near(t, "entered", a+b, gained-f.Amount(), 1e-10)
}

func TestFibreRefusesAsOne(t *testing.T) {
	spec := Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room, Cells: 32}
	f, err := NewFibre(spec, Cladding{Radius: 4e-6, Holes: 6})
	if err != nil {
		t.Fatal(err)
	}
	if err := f.Advance(time.Second, 2e5, 3e5, room); err != nil {
		t.Fatal(err)
	}
	core, hole := f.Core.State(), f.Cladding[0].State()
	for _, p := range []unit.Pascal{-1, unit.Pascal(math.NaN())} {
		if err := f.Advance(time.Second, p, 3e5, room); err == nil {
			t.Errorf("%v: accepted", float64(p))
		}
	}
	// A refusal by the second channel takes the first back.
	k := 0
	err = f.each(func(c *Core) error {
		if k++; k == 2 {
			return ErrRange
		}
		return c.Advance(time.Second, 9e5, 9e5, room)
	})
	if err == nil || f.Core.State() != core || f.Cladding[0].State() != hole {
		t.Errorf("after %v core or cladding has moved", err)
	}
	for _, bad := range []Cladding{{Radius: 1e-6}, {Holes: 3}, {Radius: -1, Holes: 3}} {
		if _, err := NewFibre(spec, bad); err == nil {
			t.Errorf("%+v: accepted", bad)
		}
	}
}
