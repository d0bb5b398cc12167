package procedure

import (
	"slices"
	"strings"

	"barline/model/form"
	"barline/model/unit"
)

// Procedure is a procedure file.
type Procedure struct {
	Procedure Head   `toml:"procedure"`
	Step      []Step `toml:"step"`
}

// Head names the procedure.
type Head struct {
	Name string `toml:"name" form:"required"`
}

// Step is one thing to do. Which keys it takes depends on Do, see verbs.
type Step struct {
	Do string `toml:"do" form:"required; oneof=evacuate|purge|fill|step|scan|hold|leak test|vent|energy"`

	To   unit.Pascal          `toml:"to" form:"gauge"`
	Rate unit.PascalPerSecond `toml:"rate" form:"above=0 bar/s"` // below that of the limits

	From         unit.Pascal   `toml:"from"`
	By           unit.Pascal   `toml:"by" form:"above=0 bar"`
	Pressures    []string      `toml:"pressures"`
	FromEmission unit.Metre    `toml:"from_emission" form:"above=0 nm"`
	ToEmission   unit.Metre    `toml:"to_emission" form:"above=0 nm"`
	EmissionBy   unit.Metre    `toml:"emission_by" form:"above=0 nm"`
	Order        string        `toml:"order" form:"default=up; oneof=up|down|up and down|random"`
	Seed         int           `toml:"seed" form:"least=0"`
	Dwell        unit.Second   `toml:"dwell" form:"least=0 s; most=1 d"`
	Within       unit.Pascal   `toml:"within" form:"above=0 bar"`
	Patience     unit.Second   `toml:"patience" form:"above=0 s; most=1 d"`
	Energies     []string      `toml:"energies"`
	pressures    []unit.Pascal // Pressures, read
	energies     []unit.Joule  // Energies, read

	Cycles int         `toml:"cycles" form:"least=0; most=50"`
	Low    unit.Pascal `toml:"low" form:"least=0 bar"`
	High   unit.Pascal `toml:"high" form:"above=0 bar"`
	Hold   unit.Second `toml:"hold" form:"least=0 s; most=1 d"`

	For     unit.Second          `toml:"for" form:"above=0 s; most=31 d"`
	MaxRise unit.PascalPerSecond `toml:"max_rise" form:"above=0 Pa/s"`

	UntilRate unit.PascalPerSecond `toml:"until_rate" form:"above=0 Pa/s"` // of an evacuation
	Energy    unit.Joule           `toml:"energy" form:"above=0 uJ; most=1 J"`
}

// verb says which keys a verb needs and which it may have besides.
type verb struct{ needs, may []string }

var verbs = map[string]verb{
	"evacuate":  {may: []string{"to", "until_rate", "rate", "within", "patience", "hold"}},
	"purge":     {needs: []string{"cycles", "low", "high"}, may: []string{"rate", "within", "patience", "hold"}},
	"fill":      {needs: []string{"to"}, may: []string{"rate", "within", "patience"}},
	"step":      {needs: []string{"to"}, may: []string{"rate", "within", "patience", "dwell"}},
	"scan":      {needs: []string{"dwell"}, may: []string{"from", "to", "by", "pressures", "from_emission", "to_emission", "emission_by", "energies", "order", "seed", "rate", "within", "patience"}},
	"hold":      {needs: []string{"for"}},
	"leak test": {needs: []string{"for"}, may: []string{"max_rise"}},
	"energy":    {needs: []string{"energy"}},
	"vent":      {may: []string{"to", "rate", "within", "patience"}},
}

var keys = []string{
	"to", "rate", "from", "by", "pressures", "from_emission", "to_emission", "emission_by", "order", "seed", "dwell",
	"within", "patience", "cycles", "low", "high", "hold", "for", "max_rise", "until_rate", "energies", "energy",
}

// Parse reads a procedure file. Name is the file's name for messages; gauge
// pressures count from ambient, and are refused where it is zero. An error is
// of type form.Mistakes and holds everything that was found.
func Parse(data []byte, name string, ambient unit.Pascal) (*Procedure, error) {
	p := new(Procedure)
	r, sound := form.Form{Noun: "procedure file", Ambient: ambient}.Read(data, name, p)
	if sound {
		if len(p.Step) == 0 && !r.Has("step") {
			r.Whole("there is nothing to do: expected at least one [[step]]")
		}
		for i := range p.Step {
			p.Step[i].check(r, path(i))
		}
	}
	if err := r.Err(); err != nil {
		return nil, err
	}
	return p, nil
}

// check finds what is wrong between the keys of a step.
func (s *Step) check(r *form.Report, at string) {
	v, known := verbs[s.Do]
	if !known {
		return // complained of already
	}
	for _, k := range keys {
		key := at + "." + k
		switch {
		case slices.Contains(v.needs, k) && !r.Has(key):
			r.Missing(key, "%q needs it", s.Do)
		case r.Has(key) && !slices.Contains(v.needs, k) && !slices.Contains(v.may, k):
			r.About(key, "does not go with %q, which takes %s", s.Do, form.Enumerate(append(slices.Clone(v.needs), v.may...), "and"))
		}
	}
	if s.Do == "purge" && s.High > 0 && s.Low >= s.High {
		r.Wrong(at+".low", "it is not below high, %v", s.High)
	}
	if s.Do == "evacuate" && !r.Has(at+".to") && !r.Has(at+".until_rate") {
		r.About(at, "an evacuation ends at a pressure, to, or when the pressure falls more slowly than until_rate")
	}
	if s.Do == "scan" {
		s.checkScan(r, at)
	}
}

// checkScan checks that a scan says in exactly one way where it goes.
func (s *Step) checkScan(r *form.Report, at string) {
	ways := []struct {
		name string
		keys []string
	}{
		{"pressures", []string{"pressures"}},
		{"from, to and by", []string{"from", "to", "by"}},
		{"from_emission, to_emission and emission_by", []string{"from_emission", "to_emission", "emission_by"}},
	}
	var used []string
	for _, w := range ways {
		given := 0
		for _, k := range w.keys {
			if r.Has(at + "." + k) {
				given++
			}
		}
		if given > 0 {
			used = append(used, w.name)
		}
		if given > 0 && given < len(w.keys) {
			r.About(at, "needs all of %s", strings.Join(w.keys, ", "))
		}
	}
	if len(used) != 1 {
		r.About(at, "a scan says where it goes in one way: pressures; from, to and by; or from_emission, to_emission and emission_by")
	}
	for i, text := range s.Pressures {
		p, err := unit.ParsePressure(text)
		if err != nil {
			r.Wrong(item(at+".pressures", i), "%s", form.Reason(err))
			continue
		}
		s.pressures = append(s.pressures, p)
	}
	for i, text := range s.Energies {
		e, err := unit.ParseEnergy(text)
		switch {
		case err != nil:
			r.Wrong(item(at+".energies", i), "%s", form.Reason(err))
		case !(e > 0):
			r.Wrong(item(at+".energies", i), "expected more than 0 uJ")
		default:
			s.energies = append(s.energies, e)
		}
	}
}
