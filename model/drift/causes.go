package drift

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Observable is something that a drift may move and that the bench can see.
type Observable uint8

const (
	// Wavelength is measured minus predicted emission, m.
	Wavelength Observable = iota
	// Strength and Width of the emission, relative to the quiet stretch.
	Strength
	Width
	// Disagreement is cell A minus cell B, Pa, with both valves open and the
	// flow settled.
	Disagreement
	// Metered is the pulse energy by the meter, relative.
	Metered
	// Warmth is the thermometer at the fibre, K.
	Warmth
	// Decay is the rate of pressure with every valve shut, Pa/s.
	Decay
	observableCount
)

// ObservableCount is the number of observables, for arrays indexed by them.
const ObservableCount = int(observableCount)

var observableText = [ObservableCount]string{
	"wavelength", "strength", "width", "gauge disagreement", "pulse energy", "fibre temperature", "pressure decay",
}

// String names the observable.
func (o Observable) String() string {
	if int(o) < ObservableCount {
		return observableText[o]
	}
	return fmt.Sprintf("observable %d", uint8(o))
}

// Slopes are how the source answers to what goes on, from the prediction in
// use or from full-field runs. Wavelength slopes are in m of emission,
// relative ones per relative change.
type Slopes struct {
	Pressure    float64 `json:"pressure_m_Pa"`
	Temperature float64 `json:"temperature_m_K"` // at constant pressure
	Energy      float64 `json:"energy_m"`        // relative change of the energy in the fibre
	Duration    float64 `json:"duration_m"`      // relative change of the pulse duration
	Core        float64 `json:"core_radius_m"`   // relative change
	Air         float64 `json:"air_m"`           // share of air

	// Relative per relative.
	StrengthEnergy   float64 `json:"strength_energy"`
	StrengthDuration float64 `json:"strength_duration"`
	WidthEnergy      float64 `json:"width_energy"`
	WidthDuration    float64 `json:"width_duration"`
}

// State is the bench that the causes act on.
type State struct {
	Pressure unit.Pascal
	// TwoGauges says that the prediction takes the mean of both cells.
	TwoGauges bool
	// EnergyMetered and TemperatureMetered say that the prediction takes the
	// measured value, so that a real change of it leaves no residual.
	EnergyMetered      bool
	TemperatureMetered bool
}

// How well slopes are known, as shares: those of pressure, temperature and air
// follow from the linear dispersion, those of energy, duration and core from
// runs of a bench that is only nearly this one, and how a coat on the core
// takes light away nobody has measured. From experience, no source.
const (
	doubtLinear   = 0.05
	doubtRuns     = 0.15
	doubtStrength = 0.2
	doubtCoat     = 0.5
)

// creeps is how fast a gauge may move by the amount that it has moved by, 1/s:
// while it does, what it reads of a shut volume says nothing of a leak.
const creeps = 1.0 / 600

// Causes lists what moves the emission of a bench, with the amounts in which
// it usually comes (common practice, no source). The signs follow from what
// the residual is: measured minus predicted, predicted from what the gauges
// say. A gauge that reads too high therefore makes the residual fall.
func Causes(s Slopes, b State) []Cause {
	share := 1.0 // of one gauge in the pressure that the prediction takes
	if b.TwoGauges {
		share = 0.5
	}
	p := float64(b.Pressure)
	energy, warmth := s.Energy, s.Temperature
	if b.EnergyMetered {
		energy = 0
	}
	if b.TemperatureMetered {
		warmth = 0
	}
	moved := func(a float64) string { return fmt.Sprintf("moved by %+.3f bar", unit.Pascal(a).Bar()) }
	percent := func(verb string) func(float64) string {
		return func(a float64) string { return fmt.Sprintf("%s by %+.1f %%", verb, 100*a) }
	}
	causes := []Cause{
		{Name: "cell A gauge zero", Odds: 1, Size: 8e3, Text: moved, Effect: [ObservableCount]float64{Wavelength: -share * s.Pressure, Disagreement: 1}},
		{Name: "cell A gauge span", Odds: 0.5, Size: 5e-3, Text: percent("changed"), Effect: [ObservableCount]float64{Wavelength: -share * s.Pressure * p, Disagreement: p}},
		{Name: "pulse energy", Odds: 2, Size: 0.06, Text: percent("changed"), Effect: [ObservableCount]float64{
			Wavelength: energy, Strength: s.StrengthEnergy, Width: s.WidthEnergy, Metered: 1}},
		{Name: "coupling into the fibre", Odds: 2, Size: 0.06, Text: percent("changed"), Effect: [ObservableCount]float64{
			Wavelength: s.Energy, Strength: s.StrengthEnergy, Width: s.WidthEnergy}},
		{Name: "pulse duration", Odds: 1, Size: 0.06, Text: percent("changed"), Effect: [ObservableCount]float64{
			Wavelength: s.Duration, Strength: s.StrengthDuration, Width: s.WidthDuration}},
		{Name: "warming of the fibre", Odds: 1, Size: 2, Text: func(a float64) string { return fmt.Sprintf("by %+.1f K", a) }, Effect: [ObservableCount]float64{
			Wavelength: warmth, Warmth: 1}},
		{Name: "spectrometer wavelength", Odds: 1, Size: 0.5e-9, Text: func(a float64) string { return fmt.Sprintf("moved by %+.2f nm", a*1e9) }, Effect: [ObservableCount]float64{
			Wavelength: 1}},
		{Name: "coating of the core", Odds: 0.5, Size: 3e-3, Text: percent("radius changed"), Effect: [ObservableCount]float64{Wavelength: s.Core, Strength: 20}},
		{Name: "air in the gas", Odds: 0.5, Size: 0.01, Text: func(a float64) string { return fmt.Sprintf("%+.2f %% of it", 100*a) }, Effect: [ObservableCount]float64{Wavelength: s.Air}},
		{Name: "slow leak", Odds: 0.5, Size: 20, Text: func(a float64) string { return fmt.Sprintf("of %.3g mbar/min", -a*0.6) }, Effect: [ObservableCount]float64{Decay: 1}},
	}
	if b.TwoGauges {
		causes = append(causes,
			Cause{Name: "cell B gauge zero", Odds: 1, Size: 8e3, Text: moved, Effect: [ObservableCount]float64{Wavelength: -share * s.Pressure, Disagreement: -1}},
			Cause{Name: "cell B gauge span", Odds: 0.5, Size: 5e-3, Text: percent("changed"), Effect: [ObservableCount]float64{Wavelength: -share * s.Pressure * p, Disagreement: -p}})
	} else { // nothing to disagree with
		for i := range causes {
			causes[i].Effect[Disagreement] = 0
		}
	}
	for i := range causes {
		c := &causes[i]
		switch c.Name {
		case "pulse energy", "coupling into the fibre", "pulse duration":
			// Where the prediction takes the metered energy, what it is off
			// by is left over.
			slope := c.Effect[Wavelength]
			if c.Name == "pulse energy" {
				slope = s.Energy
			}
			c.Doubt[Wavelength] = doubtRuns * math.Abs(slope)
			c.Doubt[Strength], c.Doubt[Width] = doubtStrength*math.Abs(c.Effect[Strength]), doubtStrength*math.Abs(c.Effect[Width])
		case "coating of the core":
			c.Doubt[Wavelength], c.Doubt[Strength] = doubtRuns*math.Abs(c.Effect[Wavelength]), doubtCoat*math.Abs(c.Effect[Strength])
		case "warming of the fibre":
			c.Doubt[Wavelength] = doubtLinear * math.Abs(s.Temperature)
		case "spectrometer wavelength", "slow leak":
		case "cell A gauge zero", "cell A gauge span", "cell B gauge zero", "cell B gauge span":
			c.Doubt[Wavelength] = doubtLinear * math.Abs(c.Effect[Wavelength])
			c.Doubt[Decay] = creeps * math.Abs(c.Effect[Disagreement])
			if !b.TwoGauges {
				c.Doubt[Decay] = creeps * math.Abs(c.Effect[Wavelength]) / math.Max(math.Abs(share*s.Pressure), 1e-300)
			}
		default:
			c.Doubt[Wavelength] = doubtLinear * math.Abs(c.Effect[Wavelength])
		}
	}
	return causes
}
