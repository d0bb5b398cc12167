package live

import (
	"fmt"
	"math"
	"time"

	"barline/model/limit"
	"barline/model/unit"
)

// MaxPhases bounds one program.
const MaxPhases = 1024

// Action is what a phase of a program does with the gas.
type Action uint8

const (
	// Reach ramps to the target and waits until the gas has settled there.
	Reach Action = iota
	// Isolate shuts inlet, pump and vent and watches what the pressure does.
	Isolate
	// Stay leaves everything as it is for the dwell.
	Stay
	// SetEnergy waits until a person has set another pulse energy.
	SetEnergy
)

// Phase is one leg of a program.
type Phase struct {
	Label    string
	Action   Action
	Target   unit.Pascal          // Reach
	Rate     unit.PascalPerSecond // Reach: at most this and the limits' own; 0 is the limits' own
	Within   unit.Pascal          // Reach: how near to the target the gas counts as settled; 0 is 20 mbar or 1 %
	Patience time.Duration        // Reach: longest wait to settle before HOLD; 0 is 10 min
	Dwell    time.Duration        // after settling; of Isolate and Stay the whole phase
	Row      bool                 // write a row of what was measured during the dwell
	// Floor, of a Reach: the gas counts as settled, wherever it is, when its
	// pressure changes more slowly than this, as an evacuation does at what its
	// pump can do; nearness counts besides where Within is given. 0 is never.
	Floor  unit.PascalPerSecond
	Energy unit.Joule // SetEnergy: in the fibre
	// MaxRise ends an Isolate in HOLD where the pressure rose faster; 0 is
	// no bound.
	MaxRise unit.PascalPerSecond
}

// Program is a run of phases. It is never changed after it was handed in.
type Program struct {
	Name string
	// First counts the steps of the whole program that came before, where this
	// is the rest of one.
	First  int
	Phases []Phase
}

// Run asks for a program. Pause stops it where it is, Resume goes on, Skip
// ends the phase under way, Stop ends the program and leaves the gas where it
// is. HOLD ends it too.
type (
	Run    struct{ Program *Program }
	Pause  struct{}
	Resume struct{}
	Skip   struct{}
	Stop   struct{}
)

func (Run) intent()    {}
func (Pause) intent()  {}
func (Resume) intent() {}
func (Skip) intent()   {}
func (Stop) intent()   {}

// Check reports why the program cannot be run within the limits, or nil.
func (p *Program) Check(l limit.Limits) error {
	if p != nil && p.First < 0 {
		return fmt.Errorf("%d steps done, expected 0 or more", p.First)
	}
	if p == nil || len(p.Phases) == 0 || len(p.Phases) > MaxPhases {
		return fmt.Errorf("a program has 1 to %d phases", MaxPhases)
	}
	for i, ph := range p.Phases {
		where := func(err error) error { return fmt.Errorf("phase %d (%s): %w", i+1, ph.Label, err) }
		if ph.Dwell < 0 || ph.Dwell > 31*24*time.Hour {
			return where(fmt.Errorf("dwell %v, expected 0 s to 31 days", ph.Dwell))
		}
		switch ph.Action {
		case Reach:
			if err := l.Admissible(ph.Target); err != nil {
				return where(err)
			}
			if !(ph.Rate >= 0) || !(ph.Within >= 0) || !(ph.Floor >= 0) || ph.Patience < 0 {
				return where(fmt.Errorf("rate %v, tolerance %v, slowest rate %v, patience %v: expected none below zero", ph.Rate, ph.Within, ph.Floor, ph.Patience))
			}
		case Isolate, Stay:
			if ph.Dwell == 0 {
				return where(fmt.Errorf("lasts 0 s, expected longer"))
			}
		case SetEnergy:
			if !(ph.Energy > 0) || math.IsInf(float64(ph.Energy), 0) {
				return where(fmt.Errorf("pulse energy %v, expected one above zero", ph.Energy))
			}
		default:
			return where(fmt.Errorf("action %d is not known", ph.Action))
		}
	}
	return nil
}

// within returns how near to its target the gas counts as settled.
func (ph *Phase) within() unit.Pascal {
	if ph.Within > 0 {
		return ph.Within
	}
	return settledWithin
}

// near returns how far from the target the cell's gauge may read in a gas that
// has settled: what the file says, or what two gauges may differ by.
func (ph *Phase) near(target unit.Pascal) unit.Pascal {
	if ph.Within > 0 {
		return ph.Within
	}
	return max(settledWithin, gaugesWithin*target)
}

func (ph *Phase) patience() time.Duration {
	if ph.Patience > 0 {
		return ph.Patience
	}
	return 10 * time.Minute
}

// Outcome is how the last program ended.
type Outcome uint8

const (
	// NoOutcome: none has ended since the last one began.
	NoOutcome Outcome = iota
	Completed
	Stopped
	EndedByHold
)

// progress is how far a program has come.
type progress struct {
	program *Program // nil where none is under way; read only
	index   int
	paused  bool

	pausedAt  time.Duration
	began     time.Duration // of the phase
	settledAt time.Duration // 0 where it has not
	from      unit.Pascal   // Isolate: pressure at the start
	emission  mean          // m, while dwelling
	residual  mean          // m
	pressure  mean          // Pa, cell A
	apart     mean          // Pa, cell A less cell B
	rise      riseLog       // Isolate
	asks      bool          // SetEnergy: a person is waited for
	turning   bool          // SetEnergy: the attenuator is
	halves    [2]mean       // Pa, cell A: of a Reach with a floor, before and now
	halfFrom  time.Duration // when the present half began
}

func (p *progress) active() bool { return p.program != nil }

func (p *progress) phase() *Phase { return &p.program.Phases[p.index] }

// mean is a running mean with its scatter (Welford, Technometrics 4, 419
// (1962)).
type mean struct {
	n        int
	value, m float64
}

func (m *mean) add(v float64) {
	m.n++
	d := v - m.value
	m.value += d / float64(m.n)
	m.m += d * (v - m.value)
}

// deviation returns the standard deviation of one value; 0 below two values.
func (m *mean) deviation() float64 {
	if m.n < 2 {
		return 0
	}
	return math.Sqrt(m.m / float64(m.n-1))
}

// Progress is how far a program has come, as a screen draws it. Count is zero
// where none is under way.
type Progress struct {
	Name         string
	Label        string // of the phase under way
	Index, Count int    // phases; Index counts from 0
	Paused       bool
	Dwelling     bool
	DwellLeft    time.Duration
	Left         time.Duration // estimate until the end of the program
	// Asks is what a person is waited for to do and Confirm; "" where nobody
	// is. Left counts no time for it.
	Asks string
}

// Progress returns how far the program has come.
func (c *Core) Progress(s *State) Progress {
	r := &s.run
	if !r.active() {
		return Progress{}
	}
	ph := r.phase()
	p := Progress{
		Name: r.program.Name, Label: ph.Label, Index: r.program.First + r.index, Count: r.program.First + len(r.program.Phases),
		Paused: r.paused, Dwelling: r.settledAt != 0,
	}
	if r.asks {
		p.Asks = r.request()
	}
	from, _ := c.rampFrom(s)
	if p.Dwelling {
		now := s.Now.Mono
		if r.paused {
			now = r.pausedAt
		}
		p.DwellLeft = max(0, ph.Dwell-(now-r.settledAt))
		p.Left = p.DwellLeft
	} else if wait, ok := s.ArriveIn(); ok {
		p.Left = wait + settledFor + ph.Dwell
	} else if ph.Action == Reach {
		p.Left = c.rampTime(from, ph) + settledFor + ph.Dwell
	}
	at := from
	if ph.Action == Reach {
		at = ph.Target
	}
	for i := r.index + 1; i < len(r.program.Phases); i++ {
		next := &r.program.Phases[i]
		p.Left += c.rampTime(at, next) + next.Dwell
		if next.Action == Reach {
			p.Left += settledFor
			at = next.Target
		}
	}
	return p
}

// rampTime returns how long the ramp of a phase takes from a setpoint.
func (c *Core) rampTime(from unit.Pascal, ph *Phase) time.Duration {
	if ph.Action != Reach {
		return 0
	}
	return c.limits.AtMost(ph.Rate).RampTime(from, ph.Target)
}
