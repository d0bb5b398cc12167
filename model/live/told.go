package live

import (
	"slices"
	"time"

	"barline/model/drift"
	"barline/model/reading"
	"barline/model/unit"
)

// Told is what a record says that another core did: a replay, or a second
// person who follows, takes it as it was and decides nothing.
type Told struct {
	At       reading.Stamp
	Setpoint unit.Pascal // where HasSetpoint
	Mode     Mode        // where HasMode
	Why      string      // beside Mode

	HasSetpoint, HasMode bool

	Means *MeansData // what ten seconds came to
	Drift *DriftData // a verdict

	Calibration *CalibrationData // what became of one
}

// When implements Event.
func (e Told) When() reading.Stamp { return e.At }

func (c *Core) told(s *State, e Told) {
	if e.HasSetpoint {
		s.Setpoint, s.Target = e.Setpoint, e.Setpoint
	}
	if e.HasMode {
		s.Mode, s.Why, s.following = e.Mode, e.Why, true
	}
	if e.Means != nil {
		s.drift.monitor.Add(c.watching(s), e.Means.Means(e.At.Mono))
	}
	if e.Calibration != nil {
		s.calibrating.tell(e.Calibration)
	}
	if e.Drift != nil {
		s.drift.tell(e.Drift)
	}
}

// tell takes a verdict as another core gave it. Of the steps it takes the
// text: nothing can be begun from here.
func (d *drifting) tell(v *DriftData) {
	d.text, d.findings, d.alike, d.steps = v.Text, nil, v.Alike, nil
	for _, f := range v.Findings {
		text := f.Text
		d.findings = append(d.findings, drift.Finding{
			Cause:       drift.Cause{Name: f.Cause, Text: func(float64) string { return text }},
			Probability: f.Probability, Amount: f.Amount, AmountSigma: f.AmountSigma, Left: f.Left,
		})
	}
	for _, n := range v.Steps {
		d.steps = append(d.steps, NextStep{
			Worth:  drift.Worth{Step: drift.Step{Name: n.Name, Cost: time.Duration(n.CostS * float64(time.Second))}, Bits: n.Bits, Certain: n.Certain},
			ByHand: "as the first screen says",
		})
	}
}

// tell takes what another core did with a calibration. Predictions here stay
// without: they have no nodes to lay it over.
func (k *calibrating) tell(d *CalibrationData) {
	if d.Calibration != nil && k.find(d.Name) == nil {
		k.known = append(slices.Clone(k.known), d.Calibration)
	}
	if d.Action != "" && d.Action != "fitted" {
		k.inUse, k.why = d.Calibration, "predictions of a second screen take no calibration"
	}
}

// ToldBy returns what a record of a command, an intent or its completion tells
// a core that follows; ok is false where it tells nothing.
func ToldBy(at reading.Stamp, data any) (e Told, ok bool) {
	e.At = at
	switch d := data.(type) {
	case MeansData:
		e.Means = &d
		return e, true
	case CalibrationData:
		e.Calibration = &d
		return e, true
	case DriftData:
		e.Drift = &d
		return e, true
	case CommandData:
		if d.isOrder() {
			return e, false
		}
		e.Setpoint, e.HasSetpoint, e.HasMode = unit.Pascal(d.SetpointPa), true, true
		e.Mode, e.Why = Ramping, d.Why
		if d.Hold {
			e.Mode = Held
		}
		if d.Hold && d.Why == isolating {
			e.Mode = Isolated
		}
		return e, true
	case IntentData:
		if d.Refused != "" {
			return e, false
		}
		e.HasMode, e.Why = true, d.Program
		switch d.Intent {
		case "arm":
			e.Mode, e.Why = Armed, ""
		case "disarm":
			e.Mode = Watching
		case "complete":
			e.Mode, e.Why = Steady, d.Program+": complete"
		default:
			return e, false
		}
		return e, true
	}
	return e, false
}
