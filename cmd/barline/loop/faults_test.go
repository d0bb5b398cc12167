package loop_test

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/simulate"
)

// inject lets a fault of the simulated bench begin.
func inject(f simulate.Fault) func(*trial) {
	return func(tr *trial) {
		if err := tr.sim.Inject(f); err != nil {
			tr.fail("%v", err)
		}
	}
}

// tampered changes the readings of one role before the core has them.
func tampered(role reading.Role, change func(tr *trial, r reading.Reading)) func(*trial) {
	return func(tr *trial) {
		tr.tamper = func(r reading.Reading) {
			if r.Role == role {
				change(tr, r)
				return
			}
			tr.loop.Reading(r)
		}
	}
}

// commands decides what becomes of every setpoint and HOLD.
func commands(fate string) func(*trial) {
	return func(tr *trial) { tr.obeying = func(uint64) string { return fate } }
}

// A fault comes while the setpoint ramps up, or where steady while it is kept.
type faultCase struct {
	name   string
	begin  func(*trial)
	steady bool
	alarm  string // "" for a fault that must not disturb
	within time.Duration
	holds  bool
}

func faultCases() []faultCase {
	frozen := 0.0
	var waiting []reading.Reading
	return []faultCase{
		{"dead gauge", inject(simulate.Fault{Kind: simulate.Dead, Where: "cell A"}), false, "cell A: no valid reading", 5 * time.Second, true},
		{"gauges unplugged", inject(simulate.Fault{Kind: simulate.Unplugged, Where: "gauges"}), false, "line to gauges lost", 5 * time.Second, true},
		{"controller unplugged", inject(simulate.Fault{Kind: simulate.Unplugged, Where: "controller"}), false, "line to controller lost", 5 * time.Second, true},
		{"spectrometer dead", inject(simulate.Fault{Kind: simulate.Dead, Where: "spectrometer"}), false, "emission: no valid reading", 5 * time.Second, false},
		{"one answer in ten of the gauges spoilt", inject(simulate.Fault{Kind: simulate.Garbage, Where: "gauges"}), false, "", time.Minute, false},
		{"gauge stuck", tampered(reading.CellAPressure, func(tr *trial, r reading.Reading) {
			if frozen == 0 {
				frozen = r.Value
			}
			r.Value = frozen
			tr.loop.Reading(r)
		}), false, "cell gauges disagree", 60 * time.Second, false},
		{"gauge lies by 0.4 bar", tampered(reading.CellBPressure, func(tr *trial, r reading.Reading) {
			r.Value += 0.4e5
			tr.loop.Reading(r)
		}), false, "held by itself", 45 * time.Second, true},
		{"gauge noisy, 0.2 bar", tampered(reading.CellAPressure, func(tr *trial, r reading.Reading) {
			r.Value += 0.2e5 * tr.rng.NormFloat64()
			tr.loop.Reading(r)
		}), false, "held by itself", 100 * time.Second, true},
		{"readings late by 3 s", tampered(reading.CellAPressure, func(tr *trial, r reading.Reading) {
			waiting = append(waiting, r)
			for len(waiting) > 0 && waiting[0].Taken.Mono <= tr.clk.Now().Mono-3*time.Second {
				tr.loop.Reading(waiting[0])
				waiting = waiting[1:]
			}
		}), false, "cell A: no valid reading", 5 * time.Second, true},
		{"readings doubled", tampered(reading.CellAPressure, func(tr *trial, r reading.Reading) {
			tr.loop.Reading(r)
			tr.loop.Reading(r)
		}), false, "", time.Minute, false},
		{"commands lost", commands("lose"), false, "command not confirmed", 8 * time.Second, true},
		{"commands refused", commands("refuse"), false, "command not confirmed", 2 * time.Second, true},
		{"commands late by 2 s", commands("delay"), false, "", time.Minute, false},
		{"inlet stuck", inject(simulate.Fault{Kind: simulate.Stuck, Where: "inlet"}), false, "held by itself", 30 * time.Second, true},
		{"inlet stuck shut, cell leaks", func(tr *trial) {
			inject(simulate.Fault{Kind: simulate.Leak, Where: "cell A", Size: 30})(tr)
			inject(simulate.Fault{Kind: simulate.Stuck, Where: "inlet"})(tr)
		}, true, "pressure away from its setpoint", 10 * time.Minute, false},
		{"supply fails high", inject(simulate.Fault{Kind: simulate.Supply}), false, "", time.Minute, false},
		{"supply fails high, inlet stuck", func(tr *trial) {
			inject(simulate.Fault{Kind: simulate.Supply})(tr)
			inject(simulate.Fault{Kind: simulate.Stuck, Where: "inlet"})(tr)
		}, false, "pressure above rating", time.Minute, true},
		{"disk lost", func(tr *trial) { tr.disk.lost = true }, false, "nothing is being recorded", time.Second, true},
		{"disk lost while steady", func(tr *trial) { tr.disk.lost = true }, true, "nothing is being recorded", time.Second, false},
		{"dead gauge while steady", inject(simulate.Fault{Kind: simulate.Dead, Where: "cell A"}), true, "cell A: no valid reading", 5 * time.Second, false},
		{"shutter shut", inject(simulate.Fault{Kind: simulate.Shutter}), true, "", time.Minute, false},
		{"room warms", inject(simulate.Fault{Kind: simulate.Warm}), true, "", time.Minute, false},
	}
}

// Every fault that matters raises its alarm within its time, and a ramp that
// leans on what was lost is held; what does not matter disturbs nobody.
func TestFaultsRaiseTheirAlarms(t *testing.T) {
	var table strings.Builder
	for i := range faultCases() {
		c := faultCases()[i]
		t.Run(c.name, func(t *testing.T) {
			var slowest, first time.Duration
			tried := seeds("BARLINE_FAULTS", 1)
			for _, seed := range tried {
				c = faultCases()[i] // with nothing kept from the seed before
				tr := newTrial(t, seed, 5*unit.Bar)
				for tr.clk.Now().Mono < 4*time.Second {
					tr.turn()
				}
				target := 11 * unit.Bar
				if c.steady {
					target = 5.2 * unit.Bar
				}
				tr.arm()
				tr.ask(live.Run{Program: &live.Program{Name: "fill", Phases: []live.Phase{{Label: "filling", Target: target, Patience: time.Minute}}}})
				for !c.steady && tr.clk.Now().Mono < 10*time.Second || c.steady && tr.loop.Snapshot().Mode != live.Steady {
					tr.turn()
				}
				began := tr.clk.Now().Mono
				c.begin(tr)
				for tr.clk.Now().Mono < began+c.within && (c.alarm == "" || tr.alarmed[c.alarm] == 0) {
					tr.turn()
				}
				at, raised := tr.alarmed[c.alarm]
				switch {
				case c.alarm == "" && len(tr.alarmed) > 0:
					tr.fail("alarms %v, want none", tr.alarmed)
				case c.alarm != "" && !raised:
					tr.fail("no alarm %q within %v; raised: %v; %v: %s", c.alarm, c.within, tr.alarmed, tr.loop.Snapshot().Mode, tr.loop.Snapshot().Why)
				}
				slowest = max(slowest, at-began)
				if first == 0 || at-began < first {
					first = at - began
				}
				for range 20 { // a second more
					tr.turn()
				}
				if held := tr.loop.Snapshot().Mode == live.Held; held != c.holds {
					tr.fail("held: %v, want %v (%v: %s)", held, c.holds, tr.loop.Snapshot().Mode, tr.loop.Snapshot().Why)
				}
			}
			alarm, delay := c.alarm, fmt.Sprintf("%.2f to %.2f s", first.Seconds(), slowest.Seconds())
			if c.alarm == "" {
				alarm, delay = "none", "-"
			}
			fmt.Fprintf(&table, "%-40s %-34s %-18s %v\n", c.name, alarm, delay, map[bool]string{true: "HOLD", false: ""}[c.holds])
		})
	}
	t.Logf("fault, alarm, delay over %d seeds:\n%s", len(seeds("BARLINE_FAULTS", 1)), table.String())
}
