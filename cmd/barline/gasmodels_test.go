package main

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"barline/model/flow"
	"barline/model/unit"
	"barline/simulate/panel"
)

// The model of the gas and the simulated bench were written apart, from
// different laws for the core and different integrators. Neither may import
// the other; here they meet.

// The core by Beskok & Karniadakis in finite volumes of density against the one
// by Knudsen's interpolation in finite volumes of moles.
func TestTwoCoresAgree(t *testing.T) {
	const radius, length, kelvin = 17e-6, 0.3, 295.0
	argon, err := flow.Named("argon")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name           string
		from, a, b     float64 // Pa
		over           time.Duration
		watch          time.Duration
		tolerance      float64 // of the largest pressure
		tailsTolerance float64 // of the pressure itself
	}{
		{"fill", 1e5, 9e5, 9e5, 200 * time.Millisecond, 400 * time.Millisecond, 0.01, 0.02},
		{"ends differ", 1e5, 9e5, 3e5, 100 * time.Millisecond, 500 * time.Millisecond, 0.01, 0.02},
		{"vent", 9e5, 1e5, 1e5, 500 * time.Millisecond, 900 * time.Millisecond, 0.01, 0.03},
		// Between viscous and molecular flow the two laws differ by some
		// per cent, and the tail is an exponential of that.
		{"evacuate", 1e5, 20, 20, time.Second, 10 * time.Second, 0.01, 0.2},
	} {
		ours, err := flow.NewCore(flow.Spec{Radius: radius, Length: length, Gas: argon.Ideal(), Temperature: kelvin, Cells: 96})
		if err != nil {
			t.Fatal(err)
		}
		if err := ours.Fill(unit.Pascal(c.from), unit.Pascal(c.from), kelvin); err != nil {
			t.Fatal(err)
		}
		start := panel.State{P: c.from, T: kelvin}
		theirs, err := panel.NewCore(panel.Argon(), radius, length, 96, start)
		if err != nil {
			t.Fatal(err)
		}
		ends := [2]panel.State{start, start}
		const step = 5 * time.Millisecond
		for at := step; at <= c.watch; at += step {
			f := min(1, float64(at)/float64(c.over))
			after := [2]panel.State{{P: c.from + (c.a-c.from)*f, T: kelvin}, {P: c.from + (c.b-c.from)*f, T: kelvin}}
			if _, err := theirs.Advance(step.Seconds(), kelvin, ends, after); err != nil {
				t.Fatal(err)
			}
			ends = after
			if err := ours.Advance(step, unit.Pascal(after[0].P), unit.Pascal(after[1].P), kelvin); err != nil {
				t.Fatal(err)
			}
			for _, z := range []float64{0.1, 0.35, 0.5, 0.8} {
				p, q := float64(ours.At(unit.Metre(z*length))), theirs.At(z).P
				if d := math.Abs(p - q); d > c.tolerance*max(c.from, c.a, c.b) || d > c.tailsTolerance*q {
					t.Fatalf("%s at %v, z = %v L: %.4g and %.4g Pa", c.name, at, z, p, q)
				}
			}
		}
	}
}

// shutBench is two cells on a manifold with walls of their own heat, filled
// faster than heat leaves and then shut, with a leak to the room.
type shutBench struct {
	net   *panel.Network
	cells [2]panel.Node
	walls [2]panel.Wall
	hub   panel.Node
}

func newShutBench(pressure, leak float64) *shutBench {
	argon := panel.Argon()
	net := panel.NewNetwork(argon)
	hot := panel.State{P: pressure, T: 301}
	b := &shutBench{net: net}
	b.hub = net.AddVolume(10e-6, hot)
	for i := range b.cells {
		b.cells[i] = net.AddVolume(60e-6, hot)
		b.walls[i] = net.AddWall(500, 0.5, 295)
		net.AddContact(b.cells[i], b.walls[i], 0.03, 0.07)
		net.Open(net.AddPassage(b.hub, b.cells[i], panel.NewOrifice(2e-9, argon)), 1)
	}
	net.AddContact(b.hub, b.walls[0], 0.02, 0.05)
	room := net.AddReservoir(panel.State{P: 101300, T: 295, Air: 1})
	net.Open(net.AddPassage(b.cells[0], room, panel.NewOrifice(leak, argon)), 1)
	return b
}

func (b *shutBench) moles() (sum float64) {
	for _, v := range []panel.Node{b.hub, b.cells[0], b.cells[1]} {
		gas, air := b.net.Moles(v)
		sum += gas + air
	}
	return sum
}

// A rate-of-rise test on the simulated panel finds the leak that is there and
// no other, while the gas cools and the walls take its heat.
func TestRiseOnTheSimulatedPanel(t *testing.T) {
	for _, leak := range []float64{0, 3e-16, 3e-15} { // m³/(s Pa)
		b := newShutBench(9e5, leak)
		random := rand.New(rand.NewPCG(3, uint64(leak*1e18)))
		var points []flow.RisePoint
		before := b.moles()
		for at := time.Duration(0); at <= 40*time.Minute; at += 10 * time.Second {
			if at > 0 {
				if err := b.net.Advance(10); err != nil {
					t.Fatal(err)
				}
			}
			p := b.net.State(b.cells[0]).P + 40*random.NormFloat64()
			wall := b.net.WallTemperature(b.walls[0])
			points = append(points, flow.RisePoint{At: at, Pressure: unit.Pascal(p), Temperature: unit.Kelvin(wall)})
		}
		lost := (b.moles() - before) / (40 * 60) * panel.R * 293.15 // Pa m³/s
		r, err := flow.FitRise(flow.RiseSpec{Volume: 130e-6, WallTime: 12 * time.Second}, points)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(r.Leak.Value-lost) > max(3*r.Leak.Sigma, 0.03*math.Abs(lost)) {
			t.Errorf("leak %v, the panel lost %.3g Pa m3/s", r.Leak, lost)
		}
	}
}
