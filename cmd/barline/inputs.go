package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/pulse"
	"barline/model/unit"
)

// inputs are the flags that say which gas, fibre and pulse to compute for.
// predict and propagate share them. Each may stand over a bench file.
type inputs struct {
	bench                                    string
	gas, pressure, temperature, air          string
	fibre, core, wall, loss, length, mode    string
	wavelength, duration, shape, energy, gdd string
	density, index, n2, plasma, emission     string
	given                                    func(flag string) bool
}

// bind adds the flags to a command.
func (in *inputs) bind(cmd *cobra.Command) {
	f := cmd.Flags()
	f.StringVarP(&in.bench, "bench", "b", "", "bench file; single flags stand over it")
	f.StringVar(&in.gas, "gas", "", `gas, or a mixture such as "argon 90 % + neon 10 %"`)
	f.StringVar(&in.pressure, "pressure", "", `absolute pressure in the core, such as "9 bar"`)
	f.StringVar(&in.temperature, "temperature", "20 degC", "temperature of the fibre")
	f.StringVar(&in.air, "air", "0 %", `share of air in the gas, such as "200 ppm"`)
	f.StringVar(&in.fibre, "fibre", "capillary", "capillary, kagome or antiresonant")
	f.StringVar(&in.core, "core-diameter", "", `core diameter, such as "34 um"`)
	f.StringVar(&in.wall, "wall", "", `glass wall round the core, such as "180 nm"; not for a capillary`)
	f.StringVar(&in.loss, "loss", "0 dB/m", "attenuation as measured")
	f.StringVar(&in.length, "length", "", `fibre length, such as "30 cm"`)
	f.StringVar(&in.mode, "mode", "HE11", "mode of the fibre, such as HE11 or HE12")
	f.StringVar(&in.wavelength, "wavelength", "", `vacuum wavelength of the pump, such as "1030 nm"`)
	f.StringVar(&in.duration, "duration", "", `full width at half maximum of the transform-limited pulse, such as "35 fs"`)
	f.StringVar(&in.shape, "shape", "sech2", "sech2 or gauss")
	f.StringVar(&in.energy, "energy", "", `pulse energy in the fibre, such as "1.5 uJ"`)
	f.StringVar(&in.gdd, "gdd", "0 fs2", "group-delay dispersion of the pulse")
	f.StringVar(&in.density, "density", "reference", "reference, virial or ideal")
	f.StringVar(&in.index, "index", "", "source of the index, such as peck-fisher-1964; empty: the gas's own default")
	f.StringVar(&in.n2, "n2", "", `source of the nonlinear index, such as lehmeier-1985, or a value such as "9.11e-24 m2/W" at 273.15 K and 101325 Pa`)
	f.StringVar(&in.plasma, "plasma", "radial", "ionisation rate over the mode: radial or averaged")
	f.StringVar(&in.emission, "emission", "estimate", "linear, estimate or anchored")
	in.given = func(flag string) bool { return f.Changed(flag) }
}

// setup returns what the flags and the bench file say together, and the input
// at their pressure, temperature and energy. swept names flags that need not be
// given: what a sweep or a plan sets by itself.
func (in *inputs) setup(command string, swept ...string) (emission.Setup, emission.Input, error) {
	var s emission.Setup
	s.Uncertainty = emission.DefaultUncertainty()
	if in.bench != "" {
		_, b, err := readBench(in.bench)
		if err != nil {
			return s, emission.Input{}, err
		}
		if s, err = emission.SetupFromBench(b); err != nil {
			return s, emission.Input{}, usage("%s: %w", in.bench, err)
		}
	}
	if missing := in.missing(swept); len(missing) > 0 {
		return s, emission.Input{}, usage("%s needs --%s, or a bench file with -b that says so; see barline %s -h", command, strings.Join(missing, ", --"), command)
	}
	r := reader{in: in, bench: in.bench != ""}
	r.read("gas", in.gas, func(text string) (err error) { s.Gas.Composition = text; return nil })
	r.read("density", in.density, func(text string) error { s.Gas.Density = text; return nil })
	r.read("index", in.index, func(text string) error { s.Gas.Index = text; return nil })
	r.read("n2", in.n2, func(text string) error { s.Gas.N2 = text; return nil })
	r.read("fibre", in.fibre, func(text string) (err error) { s.Fibre.Kind, err = fibre.ParseKind(text); return err })
	r.read("core-diameter", in.core, func(text string) error { return s.Fibre.CoreDiameter.UnmarshalText([]byte(text)) })
	r.read("wall", in.wall, func(text string) error { return s.Fibre.Wall.UnmarshalText([]byte(text)) })
	r.read("loss", in.loss, func(text string) error {
		s.Fibre.Loss.Table = nil
		return s.Fibre.Loss.Constant.UnmarshalText([]byte(text))
	})
	r.read("length", in.length, func(text string) error { return s.Fibre.Length.UnmarshalText([]byte(text)) })
	r.read("mode", in.mode, func(text string) (err error) { s.Fibre.Mode, err = fibre.ParseMode(text); return err })
	r.read("wavelength", in.wavelength, func(text string) error { return s.Pulse.Wavelength.UnmarshalText([]byte(text)) })
	r.read("duration", in.duration, func(text string) error { return s.Pulse.Duration.UnmarshalText([]byte(text)) })
	r.read("shape", in.shape, func(text string) (err error) { s.Pulse.Shape, err = emission.ParseShape(text); return err })
	r.read("energy", in.energy, func(text string) error { return s.Pulse.Energy.UnmarshalText([]byte(text)) })
	r.read("gdd", in.gdd, func(text string) error { return s.Pulse.GDD.UnmarshalText([]byte(text)) })
	r.read("plasma", in.plasma, func(text string) (err error) { s.Plasma, err = pulse.ParsePlasma(text); return err })
	r.read("emission", in.emission, func(text string) (err error) { s.Answer, err = emission.ParseAnswer(text); return err })
	if s.Fibre.Kind == fibre.Capillary && in.given("fibre") && !in.given("wall") {
		s.Fibre.Wall = 0 // the bench file's wall belongs to its own kind of fibre
	}

	input := emission.Input{Energy: s.Pulse.Energy}
	always := reader{in: in}
	if in.pressure != "" {
		always.read("pressure", in.pressure, func(text string) error { return input.Pressure.UnmarshalText([]byte(text)) })
	}
	always.read("temperature", in.temperature, func(text string) error { return input.Temperature.UnmarshalText([]byte(text)) })
	always.read("air", in.air, func(text string) error { return input.Air.UnmarshalText([]byte(text)) })
	for _, err := range []error{r.err, always.err} {
		if err != nil {
			return s, input, err
		}
	}
	return s, input, nil
}

// missing lists the flags without which nothing can be computed.
func (in *inputs) missing(swept []string) (list []string) {
	for _, f := range []struct {
		name, text string
		inBench    bool
	}{
		{"gas", in.gas, true}, {"pressure", in.pressure, false}, {"core-diameter", in.core, true},
		{"length", in.length, true}, {"wavelength", in.wavelength, true}, {"duration", in.duration, true}, {"energy", in.energy, true},
	} {
		if f.text == "" && !slices.Contains(swept, f.name) && !(f.inBench && in.bench != "") {
			list = append(list, f.name)
		}
	}
	return list
}

// reader reads flags one after another and keeps the first mistake.
type reader struct {
	in    *inputs
	bench bool // a bench file stands below: only flags that were given count
	err   error
}

func (r *reader) read(flag, text string, set func(string) error) {
	if r.err != nil || text == "" || r.bench && !r.in.given(flag) {
		return
	}
	if err := set(text); err != nil {
		r.err = usage("--%s: %w", flag, err)
	}
}

// sweep is a run of one quantity: name=from:to:step.
type sweep struct {
	name           string
	from, to, step float64 // SI
}

// mostRows bounds a sweep.
const mostRows = 100_000

// swept lists the quantities that can be swept and how their text is read.
var swept = map[string]func(string) (float64, error){
	"pressure":    func(t string) (float64, error) { v, err := unit.ParsePressure(t); return float64(v), err },
	"temperature": func(t string) (float64, error) { v, err := unit.ParseTemperature(t); return float64(v), err },
	"energy":      func(t string) (float64, error) { v, err := unit.ParseEnergy(t); return float64(v), err },
	"air":         func(t string) (float64, error) { v, err := unit.ParseFraction(t); return float64(v), err },
}

// parseSweep reads such as pressure=1bar:10bar:0.25bar; empty means none.
func parseSweep(text string) (*sweep, error) {
	if text == "" {
		return nil, nil
	}
	const wanted = `expected such as "pressure=1bar:10bar:0.25bar", with pressure, temperature, energy or air`
	name, values, _ := strings.Cut(text, "=")
	parse, ok := swept[name]
	parts := strings.Split(values, ":")
	if !ok || len(parts) != 3 {
		return nil, usage("--sweep %q: %s", text, wanted)
	}
	s := &sweep{name: name}
	for i, to := range []*float64{&s.from, &s.to, &s.step} {
		if name == "temperature" && i == 2 { // a step is a difference
			d, err := unit.ParseKelvinDifference(parts[i])
			if err != nil {
				return nil, usage("--sweep %q: step: %w", text, err)
			}
			*to = float64(d)
			continue
		}
		v, err := parse(parts[i])
		if err != nil {
			return nil, usage("--sweep %q: %w", text, err)
		}
		*to = v
	}
	if !(s.step > 0) || !(s.to >= s.from) {
		return nil, usage("--sweep %q: expected a step above zero and an end not below the start", text)
	}
	if rows := (s.to-s.from)/s.step + 1; rows > mostRows {
		return nil, usage("--sweep %q: %.0f rows, expected at most %d", text, rows, mostRows)
	}
	return s, nil
}

// each calls do with the input at every step.
func (s *sweep) each(in emission.Input, do func(emission.Input) error) error {
	for _, in := range s.inputs(in) {
		if err := do(in); err != nil {
			return fmt.Errorf("sweep of %s: %w", s.name, err)
		}
	}
	return nil
}

// at returns the input of step i.
func (s *sweep) at(in emission.Input, i int) emission.Input {
	v := s.from + float64(i)*s.step
	switch s.name {
	case "pressure":
		in.Pressure = unit.Pascal(v)
	case "temperature":
		in.Temperature = unit.Kelvin(v)
	case "energy":
		in.Energy = unit.Joule(v)
	case "air":
		in.Air = unit.Fraction(v)
	}
	return in
}

// inputs returns the input of every step.
func (s *sweep) inputs(in emission.Input) (list []emission.Input) {
	for i := range int((s.to-s.from)/s.step+1e-9) + 1 {
		list = append(list, s.at(in, i))
	}
	return list
}
