package flow

import (
	"math"
	"testing"
	"time"

	"barline/model/unit"
)

// The answer of TimeToSettle is the time at which the core, carried on,
// comes within the tolerance.
func TestTimeToSettleComesTrue(t *testing.T) {
	for _, c := range []struct {
		name      string
		gas       string
		from      unit.Pascal
		a, b      unit.Pascal
		tolerance unit.Pascal
	}{
		{"fill", "argon", 0, 9e5, 9e5, 900},
		{"evacuate", "argon", 1e5, 2, 2, 1},
		{"step", "helium", 7e5, 7.5e5, 7.5e5, 100},
		{"ends differ", "krypton", 2e5, 2.385e5, 9.1e5, 300},
		{"molecular", "xenon", 20, 0, 0, 0.5},
	} {
		t.Run(c.name, func(t *testing.T) {
			k := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, c.gas), Temperature: room, Cells: 200})
			if err := k.Fill(c.from, c.from, room); err != nil {
				t.Fatal(err)
			}
			advance(t, k, 0, c.a, c.b)
			was := k.State()
			wait, ok := k.TimeToSettle(c.tolerance)
			if !ok || wait <= 0 {
				t.Fatalf("wait %v, %v", wait, ok)
			}
			if k.State() != was {
				t.Fatal("asking moved the state")
			}
			var came time.Duration
			for math.Abs(float64(k.Lag())) > float64(c.tolerance) {
				advance(t, k, wait/400, c.a, c.b)
				if came += wait / 400; came > 2*wait {
					t.Fatalf("not settled after twice the %v foretold", wait)
				}
			}
			if math.Abs(float64(came)/float64(wait)-1) > 0.02 {
				t.Errorf("foretold %v, came after %v", wait, came)
			}
			if wait, ok := k.TimeToSettle(c.tolerance); wait != 0 || !ok {
				t.Errorf("settled, yet to wait %v", wait)
			}
		})
	}
}

// Small deviations of a molecular gas decay with 4L²/(π²D), D = (2/3)·a·v̄, one
// end open: textbook diffusion with Knudsen's coefficient.
func TestMolecularTail(t *testing.T) {
	s := Spec{Radius: 15e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: 293, Cells: 100, SealedB: true}
	k := core(t, s)
	if err := k.Fill(1e-3, 1e-3, 293); err != nil {
		t.Fatal(err)
	}
	advance(t, k, 0, 0, 0)
	v := math.Sqrt(8 * GasConstant * 293 / (math.Pi * s.Gas.MolarMass))
	want := 4 * 0.09 / (math.Pi * math.Pi * (2.0 / 3) * 15e-6 * v)
	advance(t, k, time.Duration(want*1e9), 0, 0)
	first := k.At(0.3)
	for range 100 {
		advance(t, k, time.Duration(want*1e7), 0, 0)
	}
	got := want / math.Log(float64(first/k.At(0.3)))
	if math.Abs(got/want-1) > 0.01 {
		t.Errorf("time constant %.3f s, want %.3f s", got, want)
	}
}

func TestTimeToSettleRefuses(t *testing.T) {
	k := core(t, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(t, "argon"), Temperature: room})
	advance(t, k, 0, 9e5, 9e5)
	for _, tolerance := range []unit.Pascal{0, -1, unit.Pascal(math.NaN())} {
		if _, ok := k.TimeToSettle(tolerance); ok {
			t.Errorf("tolerance %v answered", float64(tolerance))
		}
	}
	// 200 m of 2 µm bore at a millibar: months.
	slow := core(t, Spec{Radius: 2e-6, Length: 200, Gas: gasNamed(t, "xenon"), Temperature: room})
	advance(t, slow, 0, 100, 100)
	if wait, ok := slow.TimeToSettle(1); ok {
		t.Errorf("answered %v for a wait of months", wait)
	}
}
