package live

import (
	"math"
	"time"

	"barline/model/reading"
)

// shutterAfter is how long after the light came back its readings are still
// not believed: an exposure that began in the dark.
const shutterAfter = time.Second

// isLight reports whether readings of a role are about the light.
func isLight(r reading.Role) bool {
	switch r {
	case reading.PulseEnergy, reading.Emission, reading.EmissionWidth, reading.EmissionStrength:
		return true
	}
	return false
}

// Judge returns a reading as the bench as a whole makes it: what is read of the
// light while the shutter is shut or the laser off is a function check, and
// says nothing of the source; a value that is no number is a failure. What the
// instrument itself found wrong stands.
func (c *Core) Judge(s *State, r reading.Reading) reading.Reading {
	if math.IsNaN(r.Value) || math.IsInf(r.Value, 0) {
		if r.Value = 0; r.Status != reading.Failure {
			r.Status, r.Reason = reading.Failure, "the value is no number"
		}
		return r
	}
	if !isLight(r.Role) || !r.Status.Usable() && r.Status != reading.OutOfSpecification {
		return r
	}
	why := c.dark(s)
	if why == "" && s.litAt != 0 && r.Taken.Mono-s.litAt < shutterAfter {
		why = "the light has just come back"
	}
	if why != "" {
		r.Status, r.Reason = reading.FunctionCheck, why
	}
	return r
}

// dark says why there is no light, by the inputs that tell, or "". An input
// that is silent says nothing, and the light is then judged by itself.
func (c *Core) dark(s *State) string {
	for _, input := range [...]struct {
		role reading.Role
		why  string
	}{{reading.ShutterOpen, "the shutter is shut"}, {reading.LaserOn, "the laser is off"}} {
		if x := s.Reading(input.role, c.stale); x.Status.Usable() && x.Value < 0.5 {
			return input.why
		}
	}
	return ""
}
