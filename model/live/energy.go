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

// pulseEnergy returns the energy in the fibre: the meter's, else what the
// attenuator lets through, else what a person confirmed last, else that of the
// bench file.
func (c *Core) pulseEnergy(s *State) unit.Joule {
	if e := s.Reading(reading.PulseEnergy, c.stale); e.Status.Usable() {
		return unit.Joule(e.Value)
	}
	if r := s.Reading(reading.Attenuator, c.stale); r.Status.Usable() && r.Value > 0 {
		return c.fullEnergy * unit.Joule(r.Value)
	}
	if s.energy > 0 {
		return s.energy
	}
	return c.energy
}

// wantEnergy begins to set the pulse energy of the phase under way: by the
// attenuator, or by a person where there is none or it may not go there. What
// is set already need not be asked for again.
func (c *Core) wantEnergy(s *State) {
	ph := s.run.phase()
	if s.energy == ph.Energy {
		s.run.settledAt, s.Why = s.Now.Mono, ph.Label
		return
	}
	if _, err := c.limits.Energy(ph.Energy, c.fullEnergy); err == nil && c.attenuates {
		s.run.turning, s.Why = true, ph.Label
		return
	}
	s.run.asks, s.Why = true, s.run.request()
}

// turnAttenuator sends the attenuator to the energy of the phase under way.
func (c *Core) turnAttenuator(s *State, fx []Effect) []Effect {
	if !s.run.turning || s.run.paused || s.aside.command != 0 || !s.commanding() {
		return fx
	}
	o, err := c.limits.Energy(s.run.phase().Energy, c.fullEnergy)
	if err != nil {
		return c.turned(s, err.Error(), fx)
	}
	return c.sendOrder(s, o, fx)
}

// turned goes on from an attenuator that stands where it was sent. Where it
// does not, a person is asked instead.
func (c *Core) turned(s *State, failed string, fx []Effect) []Effect {
	if !s.run.turning {
		return fx
	}
	s.run.turning = false
	if failed != "" {
		s.run.asks, s.Why = true, s.run.request()
		return fx
	}
	s.run.settledAt, s.Why = s.Now.Mono, s.run.phase().Label
	return fx
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
