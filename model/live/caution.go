package live

import (
	"fmt"
	"slices"

	"barline/model/reading"
	"barline/model/unit"
)

// Caution is something that a person says to have read before gas moves that
// way.
type Caution uint8

const (
	// Arming comes before anything can move; Arm acknowledges it.
	Arming Caution = iota
	// Filling comes before the pressure rises above limits.caution_above.
	Filling
	// Venting comes before gas is let out down to the pressure of the room,
	// or pumped out.
	Venting
	cautionCount
)

var cautionText = [cautionCount]struct{ name, text string }{
	{"arming", `Gas is about to move. Ratings, relief valve and hardware interlocks come first; this program replaces none of them. The laser is class 4. Deep ultraviolet harms eyes and skin, and makes ozone in air. Follow your local codes and the people licensed to apply them.`},
	{"filling", `Compressed gas can burst cells, windows and fibre seals. Is the relief valve in its place, is the path rated for this, are shields up and everybody out of the line of the windows?`},
	{"venting", `The gas that leaves displaces the air that you breathe, and gives no warning. Does the vent line end outside or in an aired room, is it free, is nobody at its end?`},
}

// String returns when the caution comes, such as "filling".
func (c Caution) String() string {
	if c < cautionCount {
		return cautionText[c].name
	}
	return fmt.Sprintf("caution %d", uint8(c))
}

// Text returns what is to be read.
func (c Caution) Text() string {
	if c < cautionCount {
		return cautionText[c].text
	}
	return ""
}

// Understood acknowledges a caution, until the bench is held, disarmed or no
// longer armed.
type Understood struct{ Caution Caution }

func (Understood) intent() {}

// ventsBelow is the multiple of the room's pressure at which letting gas out
// counts as venting.
const ventsBelow = 1.2

// standardAmbient stands in where no barometer and no bench file says
// (ISO 2533:1975).
const standardAmbient = 101325 * unit.Pascal(1)

// CautionsOf returns the cautions besides Arming that come before program p
// moves gas that stands at a pressure now. Above is limits.caution_above, 0
// for none; ambient is the room's pressure, 0 where it is not known.
func CautionsOf(p *Program, now, above, ambient unit.Pascal) []Caution {
	if ambient <= 0 {
		ambient = standardAmbient
	}
	var out []Caution
	add := func(c Caution) {
		if !slices.Contains(out, c) {
			out = append(out, c)
		}
	}
	for i := range p.Phases {
		ph := &p.Phases[i]
		if ph.Action != Reach {
			continue
		}
		if above > 0 && now <= above && ph.Target > above {
			add(Filling)
		}
		if now > ventsBelow*ambient && ph.Target <= ventsBelow*ambient {
			add(Venting)
		}
		now = ph.Target
	}
	return out
}

// cautious says which caution program p needs and nobody has acknowledged, as
// an error, or nil.
func (c *Core) cautious(s *State, p *Program) error {
	now, _ := c.pressure(s)
	ambient := c.ambient
	if r := s.Reading(reading.Ambient, c.stale); r.Status.Usable() {
		ambient = unit.Pascal(r.Value)
	}
	for _, x := range CautionsOf(p, now, c.cautionAbove, ambient) {
		if !s.understood[x] {
			return fmt.Errorf("the caution at %v has not been acknowledged", x)
		}
	}
	return nil
}

// Acknowledged returns the cautions that stand acknowledged.
func (s *State) Acknowledged() []Caution {
	var out []Caution
	for x, yes := range s.understood {
		if yes {
			out = append(out, Caution(x))
		}
	}
	return out
}
