package live

import (
	"fmt"
	"time"

	"barline/model/limit"
	"barline/model/unit"
)

// MaxSteps bounds one run of pressure steps.
const MaxSteps = 128

// Run asks for a run of pressure steps: go to each target in turn, wait until
// the gas has settled, stay for Dwell, and record a row.
type Run struct {
	Targets []unit.Pascal
	Dwell   time.Duration
}

func (Run) intent() {}

// check reports why the run cannot be made within the limits.
func (r Run) check(l limit.Limits) error {
	if len(r.Targets) == 0 || len(r.Targets) > MaxSteps {
		return fmt.Errorf("a run has %d steps, expected 1 to %d", len(r.Targets), MaxSteps)
	}
	if r.Dwell < 0 || r.Dwell > 24*time.Hour {
		return fmt.Errorf("a run dwells %v, expected 0 s to 24 h", r.Dwell)
	}
	for i, p := range r.Targets {
		if err := l.Admissible(p); err != nil {
			return fmt.Errorf("step %d: %w", i+1, err)
		}
	}
	return nil
}

// Steps is how far a run has come. Count is zero where none is under way.
type Steps struct {
	Targets [MaxSteps]unit.Pascal
	Count   int
	Index   int // of the step under way, from 0
	Dwell   time.Duration
	// SettledAt is when the step under way settled; 0 where it has not.
	SettledAt time.Duration

	sum   float64 // of the residuals taken since it settled, m
	taken int
}

// Active reports whether a run is under way.
func (s *Steps) Active() bool { return s.Index < s.Count }

// StepProgress is how far a run of steps has come, as a screen draws it.
// Count is zero where none is under way.
type StepProgress struct {
	Index, Count int
	Dwelling     bool
	DwellLeft    time.Duration
}

// Progress returns how far the run has come at now.
func (s *Steps) Progress(now time.Duration) StepProgress {
	if !s.Active() {
		return StepProgress{}
	}
	p := StepProgress{Index: s.Index, Count: s.Count, Dwelling: s.SettledAt != 0}
	if p.Dwelling {
		p.DwellLeft = max(0, s.Dwell-(now-s.SettledAt))
	}
	return p
}
