package live

import (
	"fmt"
	"slices"
	"time"

	"barline/model/reading"
	"barline/model/unit"
)

// Plan is a program as the record keeps it.
type Plan struct {
	Name   string     `json:"name"`
	First  int        `json:"first,omitempty"`
	Phases []PlanData `json:"phases"`
}

// PlanData is a phase as the record keeps it.
type PlanData struct {
	Label     string  `json:"label"`
	Action    string  `json:"action"`
	TargetPa  float64 `json:"target_Pa,omitempty"`
	RatePaS   float64 `json:"rate_Pa_s,omitempty"`
	WithinPa  float64 `json:"within_Pa,omitempty"`
	FloorPaS  float64 `json:"floor_Pa_s,omitempty"`
	PatienceS float64 `json:"patience_s,omitempty"`
	DwellS    float64 `json:"dwell_s,omitempty"`
	MaxRise   float64 `json:"max_rise_Pa_s,omitempty"`
	EnergyJ   float64 `json:"energy_J,omitempty"`
	Row       bool    `json:"row,omitempty"`
}

var actionText = [...]string{"reach", "isolate", "stay", "set energy"}

// plan returns the program as the record keeps it.
func (p *Program) plan() *Plan {
	out := &Plan{Name: p.Name, First: p.First, Phases: make([]PlanData, len(p.Phases))}
	for i, ph := range p.Phases {
		out.Phases[i] = PlanData{
			Label: ph.Label, Action: actionText[ph.Action], TargetPa: float64(ph.Target), RatePaS: float64(ph.Rate),
			WithinPa: float64(ph.Within), FloorPaS: float64(ph.Floor), PatienceS: ph.Patience.Seconds(), DwellS: ph.Dwell.Seconds(),
			MaxRise: float64(ph.MaxRise), EnergyJ: float64(ph.Energy), Row: ph.Row,
		}
	}
	return out
}

// program returns what the record kept. It is checked against the limits like
// any other program before it runs.
func (p *Plan) program() (*Program, error) {
	out := &Program{Name: p.Name, First: p.First, Phases: make([]Phase, len(p.Phases))}
	for i, d := range p.Phases {
		action := slices.Index(actionText[:], d.Action)
		if action < 0 {
			return nil, fmt.Errorf("phase %d (%s): action %q is not known", i+1, d.Label, d.Action)
		}
		out.Phases[i] = Phase{
			Label: d.Label, Action: Action(action), Target: unit.Pascal(d.TargetPa), Rate: unit.PascalPerSecond(d.RatePaS),
			Within: unit.Pascal(d.WithinPa), Floor: unit.PascalPerSecond(d.FloorPaS), Patience: seconds(d.PatienceS), Dwell: seconds(d.DwellS),
			MaxRise: unit.PascalPerSecond(d.MaxRise), Energy: unit.Joule(d.EnergyJ), Row: d.Row,
		}
	}
	return out, nil
}

func seconds(s float64) time.Duration { return unit.Second(s).Duration() }

// Rest returns the program without its first n phases, which are done. A pulse
// energy that they had set is asked for again, since nobody knows what became
// of it.
func (p *Program) Rest(n int) (*Program, error) {
	if n < 0 || n >= len(p.Phases) {
		return nil, fmt.Errorf("%q has %d steps, it cannot go on behind step %d", p.Name, len(p.Phases), n)
	}
	out := &Program{Name: p.Name, First: p.First + n, Phases: p.Phases[n:]}
	for i := n - 1; i >= 0 && p.Phases[n].Action != SetEnergy; i-- {
		if p.Phases[i].Action == SetEnergy {
			out.First--
			out.Phases = append([]Phase{p.Phases[i]}, out.Phases...)
			break
		}
	}
	return out, nil
}

// Unfinished is a program that a record shows as begun and never ended, as
// after a crash. Nothing goes on with it by itself.
type Unfinished struct {
	Began reading.Stamp
	Held  string // why HOLD ended it; "" where the record just ends

	plan *Plan
	done int // phases
}

// See takes one record of a logbook, in order: its data decoded. Only intents,
// steps and commands tell something; other data does nothing.
func (u *Unfinished) See(at reading.Stamp, data any) {
	switch d := data.(type) {
	case IntentData:
		switch {
		case d.Refused != "":
		case d.Intent == "run" && d.Plan != nil:
			*u = Unfinished{Began: at, plan: d.Plan}
		case u.plan == nil || u.Held != "":
		case d.Intent == "begin" && d.Program == u.plan.Name:
			u.done = max(u.done, d.Phase-1-u.plan.First)
		case d.Intent == "complete" && d.Program == u.plan.Name, d.Intent == "stop":
			*u = Unfinished{}
		}
	case StepData:
		if u.plan != nil && u.Held == "" && d.Program == u.plan.Name {
			u.done = max(u.done, d.Step-u.plan.First)
		}
	case CommandData:
		if u.plan != nil && d.Hold && d.Why != isolating && u.Held == "" {
			u.Held = d.Why
		}
	}
}

// Steps returns how many steps are done and of how many, counted from the
// beginning of the whole program; 0, 0 where nothing is unfinished.
func (u *Unfinished) Steps() (done, of int) {
	if u == nil || u.plan == nil || u.done >= len(u.plan.Phases) {
		return 0, 0
	}
	return u.plan.First + u.done, u.plan.First + len(u.plan.Phases)
}

// Program returns what is left to do; nil where nothing is unfinished or the
// record cannot be understood.
func (u *Unfinished) Program() *Program {
	if _, of := u.Steps(); of == 0 {
		return nil
	}
	whole, err := u.plan.program()
	if err != nil {
		return nil
	}
	rest, err := whole.Rest(u.done)
	if err != nil {
		return nil
	}
	return rest
}

// String says what is offered, such as: "scan" ended after step 12 of 41
// (HOLD: asked for).
func (u *Unfinished) String() string {
	done, of := u.Steps()
	if of == 0 {
		return "nothing is unfinished"
	}
	why := "the record just ends"
	if u.Held != "" {
		why = "HOLD: " + u.Held
	}
	return fmt.Sprintf("%q, begun %s UTC, ended after step %d of %d (%s)", u.plan.Name, u.Began.UTC.UTC().Format("2006-01-02 15:04:05"), done, of, why)
}
