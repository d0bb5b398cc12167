package procedure

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"barline/model/limit"
	"barline/model/live"
	"barline/model/unit"
)

// Bench is what compiling needs to know of the bench.
type Bench struct {
	Limits  limit.Limits
	Ambient unit.Pascal // where a vent without target goes
	// PressureFor returns the pressure at which the model puts the emission,
	// for scans in equal steps of wavelength; nil refuses those.
	PressureFor func(emission unit.Metre) (unit.Pascal, error)
}

func path(i int) string            { return fmt.Sprintf("step[%d]", i) }
func item(at string, i int) string { return fmt.Sprintf("%s[%d]", at, i) }

// Compile turns the procedure into a program and checks every phase of it
// against the limits.
func (p *Procedure) Compile(b Bench) (*live.Program, error) {
	out := &live.Program{Name: p.Procedure.Name}
	for i := range p.Step {
		phases, err := p.Step[i].phases(b)
		if err != nil {
			return nil, fmt.Errorf("%s: step %d (%s): %w", p.Procedure.Name, i+1, p.Step[i].Do, err)
		}
		out.Phases = append(out.Phases, phases...)
	}
	if err := out.Check(b.Limits); err != nil {
		return nil, fmt.Errorf("%s: %w", p.Procedure.Name, err)
	}
	return out, nil
}

func (s *Step) reach(label string, to unit.Pascal, dwell unit.Second, row bool) live.Phase {
	return live.Phase{
		Label: label, Action: live.Reach, Target: to, Rate: s.Rate, Within: s.Within,
		Patience: s.Patience.Duration(), Dwell: dwell.Duration(), Row: row,
	}
}

func (s *Step) phases(b Bench) ([]live.Phase, error) {
	switch s.Do {
	case "evacuate":
		ph := s.reach("evacuating", s.To, s.Hold, false)
		ph.Floor = s.UntilRate
		return []live.Phase{ph}, nil
	case "energy":
		return []live.Phase{setEnergy(s.Energy)}, nil
	case "fill":
		return []live.Phase{s.reach("filling", s.To, 0, false)}, nil
	case "step":
		return []live.Phase{s.reach("step to "+s.To.String(), s.To, s.Dwell, true)}, nil
	case "hold":
		return []live.Phase{{Label: "holding", Action: live.Stay, Dwell: s.For.Duration()}}, nil
	case "leak test":
		return []live.Phase{{Label: "leak test, valves shut", Action: live.Isolate, Dwell: s.For.Duration(), Row: true, MaxRise: s.MaxRise}}, nil
	case "vent":
		to := s.To
		if to == 0 {
			to = b.Ambient
		}
		if !(to > 0) {
			return nil, fmt.Errorf("where to is not known: give to, or panel.ambient in the bench file")
		}
		return []live.Phase{s.reach("venting", to, 0, false)}, nil
	case "purge":
		var out []live.Phase
		for i := range s.Cycles {
			out = append(out,
				s.reach(fmt.Sprintf("purge %d of %d, down", i+1, s.Cycles), s.Low, s.Hold, false),
				s.reach(fmt.Sprintf("purge %d of %d, up", i+1, s.Cycles), s.High, 0, false))
		}
		return out, nil
	case "scan":
		return s.scan(b)
	}
	return nil, fmt.Errorf("%q is not a verb", s.Do)
}

func setEnergy(e unit.Joule) live.Phase {
	return live.Phase{Label: "pulse energy " + e.String(), Action: live.SetEnergy, Energy: e}
}

// scan returns the phases of a scan in their order: all pressures at the first
// pulse energy, then all at the next, since somebody may have to set it.
func (s *Step) scan(b Bench) ([]live.Phase, error) {
	targets, err := s.targets(b)
	if err != nil {
		return nil, err
	}
	switch s.Order {
	case "down":
		slices.Reverse(targets)
	case "up and down":
		back := slices.Clone(targets)
		slices.Reverse(back)
		targets = append(targets, back[1:]...)
	}
	rng := rand.New(rand.NewPCG(uint64(s.Seed), 0))
	rounds, all := max(1, len(s.energies)), len(targets)*max(1, len(s.energies))
	var out []live.Phase
	for round := range rounds {
		if s.Order == "random" { // another order at each energy
			rng.Shuffle(len(targets), func(i, j int) { targets[i], targets[j] = targets[j], targets[i] })
		}
		at := ""
		if len(s.energies) > 0 {
			at = " at " + s.energies[round].String()
			out = append(out, setEnergy(s.energies[round]))
		}
		for i, p := range targets {
			out = append(out, s.reach(fmt.Sprintf("scan %d of %d%s", round*len(targets)+i+1, all, at), p, s.Dwell, true))
		}
	}
	return out, nil
}

// targets returns the pressures of a scan, ascending unless they were listed.
func (s *Step) targets(b Bench) ([]unit.Pascal, error) {
	switch {
	case len(s.pressures) > 0:
		return slices.Clone(s.pressures), nil
	case s.By > 0:
		n, err := count(float64(s.From), float64(s.To), float64(s.By))
		if err != nil {
			return nil, err
		}
		out := make([]unit.Pascal, n)
		for i := range out {
			out[i] = s.From + unit.Pascal(i)*s.By
		}
		return out, nil
	case s.EmissionBy > 0:
		if b.PressureFor == nil {
			return nil, fmt.Errorf("no model says at which pressure the source emits where")
		}
		n, err := count(float64(s.FromEmission), float64(s.ToEmission), float64(s.EmissionBy))
		if err != nil {
			return nil, err
		}
		out := make([]unit.Pascal, n)
		for i := range out {
			if out[i], err = b.PressureFor(s.FromEmission + unit.Metre(i)*s.EmissionBy); err != nil {
				return nil, err
			}
		}
		slices.Sort(out)
		return out, nil
	}
	return nil, fmt.Errorf("the scan has no pressures")
}

// count returns how many points a row from, from+by, … to has. The last one
// may miss to by a thousandth of by.
func count(from, to, by float64) (int, error) {
	steps := (to - from) / by
	n := math.Floor(steps+1e-3) + 1
	switch {
	case !(steps >= 0):
		return 0, fmt.Errorf("the scan ends below its start; expected from below to, and order = \"down\" to go down")
	case n > live.MaxPhases:
		return 0, fmt.Errorf("the scan has %.0f points, expected at most %d", n, live.MaxPhases)
	}
	return int(n), nil
}
