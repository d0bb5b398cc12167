package flow

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"testing"
	"time"

	"barline/model/unit"
)

// bench is a truth that the forecast does not know: its own equations, stepped
// plainly, with valves, pump, controller and walls that differ from what is
// configured.

type trueBench struct {
	kind     string
	random   *rand.Rand
	p, to    float64 // Pa
	setpoint float64
	ramp     float64 // Pa/s
	follow   float64 // s
	actuator float64 // s
	rate     float64 // Pa/s that the actuator gives now
	up, down float64 // 1/s: largest rates, relative to supply and to p
	pump     float64 // 1/s
	ultimate float64
	noise    float64
}

const benchStep = 0.005 // s

func (b *trueBench) step() {
	if b.kind == "evacuate" {
		if b.p > b.to { // then the pump valve shuts
			b.p -= b.pump * (b.p - b.ultimate) * benchStep
		}
		return
	}
	if d := b.to - b.setpoint; math.Abs(d) > b.ramp*benchStep {
		b.setpoint += math.Copysign(b.ramp*benchStep, d)
	} else {
		b.setpoint = b.to
	}
	want := (b.setpoint - b.p) / b.follow
	supply := 18e5 // a nozzle of argon: choked below 0.487, ellipse above
	most := b.up * supply
	if r := b.p / supply; r > 0.487 {
		most *= math.Sqrt(math.Max(0, 1-math.Pow((r-0.487)/0.513, 2)))
	}
	want = math.Min(most, math.Max(-b.down*b.p, want))
	b.rate += (want - b.rate) * benchStep / b.actuator
	b.p += b.rate * benchStep
}

func (b *trueBench) gauge() unit.Pascal {
	if b.kind == "evacuate" {
		return unit.Pascal(b.p*(1+0.002*b.random.NormFloat64()) + b.random.NormFloat64())
	}
	return unit.Pascal(b.p + b.noise*b.random.NormFloat64())
}

// drawn makes a case: the truth, and what the forecast is told.
func drawn(t *testing.T, seed uint64) (*trueBench, Aim) {
	random := rand.New(rand.NewPCG(seed, 91))
	between := func(a, b float64) float64 { return a + (b-a)*random.Float64() }
	gas := gasNamed(t, "argon")
	volume := 140e-6 * between(0.9, 1.1)
	a := Aim{Core: Spec{Radius: 17e-6, Length: 0.3, Gas: gas, Temperature: room}}
	a.Handling = Handling{Panel: Panel{Cell: Cell{Gas: gas, Volume: 140e-6, Wall: room}}, Rise: 0.2e5, Fall: 0.2e5, PumpBelow: 1.2e5}
	b := &trueBench{kind: [...]string{"fill", "evacuate", "step"}[seed%3], random: random,
		ramp: 0.2e5, follow: between(0.5, 2.5), actuator: between(0.05, 0.3), noise: between(30, 150)}
	// Needle and vent: C in m³/(s Pa) of air; here as relative rates 1/s.
	needle, vent := between(0.6e-11, 6e-11), between(2e-11, 10e-11)
	perSecond := func(c float64) float64 {
		return Valve{Conductance: c}.MolarFlow(gas, 1e5, room, 0, room) * GasConstant * float64(room) / (volume * 1e5)
	}
	b.up, b.down = perSecond(needle), perSecond(vent)
	a.Inlet = Regulator{Supply: 150e5, Set: 18e5, Band: 0.5e5, Open: Valve{Conductance: 1e-8}}
	a.Needle, a.Vent = Valve{Conductance: needle * between(0.7, 1.4)}, Valve{Conductance: vent * between(0.7, 1.4)}
	a.Ambient, a.Controlled = 101325, true
	a.Follow = time.Duration(b.follow * between(0.6, 1.6) * 1e9)
	a.Tolerance = 1000
	switch b.kind {
	case "fill":
		b.p, b.to = between(0, 1e5), between(5e5, 12e5)
	case "step":
		b.p = between(7e5, 12e5)
		b.to = b.p + math.Copysign(between(0.3e5, 3e5), between(-1, 1))
		b.to = max(6e5, min(13e5, b.to))
	case "evacuate":
		b.pump, b.ultimate = between(1e-6, 6e-6)/volume, math.Exp(between(math.Log(0.5), math.Log(8)))
		b.p, b.to = between(0.5e5, 1.1e5), between(100, 500)
		a.Pump = Pump{Speed: b.pump * volume * between(0.7, 1.4), Ultimate: 2}
		a.Tolerance, a.Controlled, a.Fall = 20, false, 0
	}
	a.From, a.Target = unit.Pascal(b.p), unit.Pascal(b.to)
	b.setpoint = b.p
	return b, a
}

// Estimates of the time to settle, from half-way on, within 10 % of what is
// left or 2 s, in 95 % of 200 seeded fills, evacuations and steps. A case
// counts only if every estimate holds, twice a second. Here the first 60 of
// them; BARLINE_SOAK=1 runs the 200 and 1800 others.
func TestForecastComesTrue(t *testing.T) {
	type tally struct{ runs, good int }
	kinds := map[string]*tally{"fill": {}, "evacuate": {}, "step": {}}
	runs := uint64(60)
	if os.Getenv("BARLINE_SOAK") != "" {
		runs = 2000
	}
	for seed := range runs {
		b, aim := drawn(t, seed)
		f, err := NewForecast(aim)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		spec := aim.Core
		spec.Cells = 24
		k := core(t, spec)
		if err := k.Fill(aim.From, aim.From, room); err != nil {
			t.Fatal(err)
		}
		type said struct {
			at, left float64
			ok       bool
		}
		var all []said
		settled, now := 0.0, 0.0
		for n := 0; settled == 0 || now < settled+3; n++ {
			if n%20 == 0 { // ten readings a second
				at := time.Duration(n/20) * 100 * time.Millisecond
				now = at.Seconds()
				p := b.gauge()
				setpoint := unit.Pascal(b.setpoint)
				if b.kind == "evacuate" {
					setpoint = 0
				}
				if err := f.See(at, p, setpoint); err != nil {
					t.Fatal(err)
				}
				if n > 0 {
					if err := k.Advance(100*time.Millisecond, unit.Pascal(b.p), unit.Pascal(b.p), room); err != nil {
						t.Fatal(err)
					}
				}
				off := math.Abs(b.p - b.to)
				if !aim.Controlled {
					off = max(0, b.p-b.to)
				}
				if off > float64(aim.Tolerance) || math.Abs(float64(k.Lag())) > float64(aim.Tolerance) {
					settled = 0
				} else if settled == 0 {
					settled = now
				}
				if n%100 == 0 {
					var wait time.Duration
					if off <= float64(aim.Tolerance) {
						wait, _ = k.TimeToSettle(aim.Tolerance)
					}
					left, ok := f.Left(wait)
					all = append(all, said{now, left.Seconds(), ok})
				}
			}
			if now > 3600 {
				t.Fatalf("seed %d (%s): the truth does not settle, %v to %v at %v", seed, b.kind, aim.From, aim.Target, b.p)
			}
			b.step()
		}
		worst, detail := 0.0, ""
		for _, s := range all {
			if s.at < settled/2 || s.at > settled {
				continue
			}
			left := settled - s.at
			miss := math.Abs(s.left-left) / max(0.1*left, 2)
			if !s.ok {
				miss = 9
			}
			if miss > worst {
				worst, detail = miss, fmt.Sprintf("at %.1f of %.1f s: said %.1f, came %.1f", s.at, settled, s.left, left)
			}
		}
		kinds[b.kind].runs++
		if worst <= 1 {
			kinds[b.kind].good++
		} else {
			t.Logf("seed %d %s %v to %v: %s", seed, b.kind, aim.From, aim.Target, detail)
		}
	}
	good := 0
	for kind, k := range kinds {
		good += k.good
		t.Logf("%s: %d of %d", kind, k.good, k.runs)
	}
	if good < int(runs)*95/100 {
		t.Errorf("%d of %d within 10 %% or 2 s", good, runs)
	}
}

func TestForecastRefuses(t *testing.T) {
	_, aim := drawn(t, 1)
	f, err := NewForecast(aim)
	if err != nil {
		t.Fatal(err)
	}
	if _, ok := f.Left(0); ok {
		t.Error("an estimate before the first reading")
	}
	if err := f.See(time.Second, aim.From, 0); err != nil {
		t.Fatal(err)
	}
	was := f
	for name, see := range map[string]func() error{
		"back in time": func() error { return f.See(time.Second/2, aim.From, 0) },
		"twice":        func() error { return f.See(time.Second, aim.From, 0) },
		"NaN":          func() error { return f.See(2*time.Second, unit.Pascal(math.NaN()), 0) },
	} {
		err := see()
		now, _ := f.Left(0)
		before, _ := was.Left(0)
		if err == nil || now != before || f.seen != was.seen {
			t.Errorf("%s: accepted, or the forecast moved", name)
		}
	}
	// A gauge below zero is a number: it counts.
	for at := 2 * time.Second; at < 12*time.Second; at += 100 * time.Millisecond {
		if err := f.See(at, -5, 0); err != nil {
			t.Error(err)
		}
	}
	if wait, ok := f.Left(time.Second); !ok || wait != time.Second {
		t.Errorf("below the target: %v, %v", wait, ok)
	}
	aim.Tolerance = 0
	if _, err := NewForecast(aim); err == nil {
		t.Error("no tolerance: accepted")
	}
	aim.Tolerance, aim.Target = 10, 0.1
	if _, err := NewForecast(aim); !errors.Is(err, ErrNever) {
		t.Errorf("below the ultimate pressure: %v", err)
	}
}
