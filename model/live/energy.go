package live

import (
	"fmt"
	"math"

	"barline/model/reading"
	"barline/model/unit"
)

// Confirm says that a person has done what the program waits for, such as
// setting another pulse energy.
type Confirm struct{}

func (Confirm) intent() {}

// meterWithin is how far a meter may read from a pulse energy that a person
// says is set.
const meterWithin = 0.1

// pulseEnergy returns the energy in the fibre: the meter's, else what a person
// confirmed last, else that of the bench file.
func (c *Core) pulseEnergy(s *State) unit.Joule {
	if e := s.Reading(reading.PulseEnergy, c.stale); e.Status.Usable() {
		return unit.Joule(e.Value)
	}
	if s.energy > 0 {
		return s.energy
	}
	return c.energy
}

// wantEnergy begins the waiting for a person who sets the pulse energy of the
// phase under way. What was confirmed already need not be asked for again.
func (c *Core) wantEnergy(s *State) {
	ph := s.run.phase()
	if s.energy == ph.Energy {
		s.run.settledAt, s.Why = s.Now.Mono, ph.Label
		return
	}
	s.run.asks, s.Why = true, s.run.request()
}

// request says what the program waits for somebody to do; "" where it waits
// for nobody.
func (p *progress) request() string {
	if !p.active() || p.phase().Action != SetEnergy {
		return ""
	}
	return fmt.Sprintf("set the pulse energy in the fibre to %v, then confirm", p.phase().Energy)
}

// confirmed takes a person's word that the energy is set, as far as a meter
// does not contradict it.
func (c *Core) confirmed(s *State) error {
	if !s.run.active() || !s.run.asks {
		return fmt.Errorf("no program waits for a confirmation")
	}
	want := s.run.phase().Energy
	if e := s.Reading(reading.PulseEnergy, c.stale); e.Status.Usable() && math.Abs(e.Value-float64(want)) > meterWithin*float64(want) {
		return fmt.Errorf("%s reads %v and %v is asked for: set it, or skip this step", e.Channel, unit.Joule(e.Value), want)
	}
	s.energy, s.run.asks, s.run.settledAt = want, false, s.Now.Mono
	if !s.run.paused {
		s.Why = s.run.phase().Label
	}
	return nil
}
