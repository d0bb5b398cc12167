package main

import (
	"barline/model/flow"
	"barline/model/plan"
	"barline/model/unit"
)

// plannedObject is what plan --json prints.
type plannedObject struct {
	Target      [2]number        `json:"target_nm"` // the shorter first
	Temperature number           `json:"temperature_K"`
	Pressures   [2]number        `json:"pressures_bar"`
	Energies    [2]number        `json:"energies_uJ"`
	Tolerance   number           `json:"tolerance_nm"`
	Choices     []plannedChoice  `json:"choices"`
	Refusals    []plannedRefusal `json:"refusals"`
}

type plannedChoice struct {
	Gas            string         `json:"gas"`
	Answer         string         `json:"answer"`
	Pressure       number         `json:"pressure_bar"`
	PressureRange  [2]number      `json:"pressure_range_bar"`
	Energy         number         `json:"energy_uJ"`
	EnergyRange    [2]number      `json:"energy_range_uJ"`
	Covers         [2]number      `json:"covers_nm"`
	Whole          bool           `json:"whole_target"`
	Emission       *number        `json:"emission_nm"`
	Sigma          *number        `json:"emission_sigma_nm"`
	Margin         number         `json:"narrowest_margin_percent"`
	Narrowest      string         `json:"narrowest"`
	PerPressure    number         `json:"nm_per_mbar"`
	PerTemperature number         `json:"nm_per_K"`
	PerEnergy      *number        `json:"nm_per_percent_energy"`
	SteadyPressure *number        `json:"pressure_within_mbar"`
	SteadyTemp     *number        `json:"temperature_within_K"`
	Limits         []plannedLimit `json:"limits"`
	Fill           *plannedFill   `json:"fill"`
	Propagated     *plannedLight  `json:"propagated,omitempty"`
}

type plannedLimit struct {
	predictedLimit
	Margin number `json:"margin_percent"`
	Hard   bool   `json:"hard"`
}

type plannedFill struct {
	Cycles int    `json:"purge_cycles"`
	Purge  number `json:"purge_s"`
	Air    number `json:"air_left_ppm"`
	Fill   number `json:"fill_s"`
	Core   number `json:"core_s"`
	Gas    number `json:"gas_norm_litres"`
	Why    string `json:"why,omitempty"`
}

type plannedLight struct {
	First       *number  `json:"emission_at_planned_pressure_nm"`
	Pressure    number   `json:"corrected_pressure_bar"`
	Emission    *number  `json:"emission_nm"`
	Width       *number  `json:"emission_width_nm"`
	Conversion  number   `json:"conversion_percent"`
	Ionised     number   `json:"ionised_fraction"`
	PerPressure *number  `json:"nm_per_mbar"`
	PerEnergy   *number  `json:"nm_per_percent_energy"`
	Runs        int      `json:"runs"`
	Reliable    bool     `json:"reliable"`
	Reasons     []string `json:"reasons"`
}

type plannedRefusal struct {
	Gas      string         `json:"gas"`
	Why      string         `json:"why"`
	Pressure *number        `json:"pressure_bar"`
	Energy   *number        `json:"energy_uJ"`
	Needs    []plannedLimit `json:"needs"`
	Nearest  *number        `json:"nearest_allowed_emission_nm"`
}

// planned turns a plan into what --json prints.
func planned(p *plan.Plan, confirmed []plan.Confirmed, tolerance unit.Metre) plannedObject {
	q := p.Question
	o := plannedObject{
		Target:      [2]number{number(q.Target.From.Nanometres()), number(q.Target.To.Nanometres())},
		Temperature: number(q.Temperature),
		Pressures:   [2]number{number(q.Pressure.From.Bar()), number(q.Pressure.To.Bar())},
		Energies:    [2]number{number(q.Energy.From.Microjoules()), number(q.Energy.To.Microjoules())},
		Tolerance:   number(tolerance.Nanometres()),
		Choices:     []plannedChoice{}, Refusals: []plannedRefusal{},
	}
	for i, c := range p.Choices {
		one := plannedOne(c, tolerance)
		if i < len(confirmed) {
			one.Propagated = plannedLightOf(confirmed[i])
		}
		o.Choices = append(o.Choices, one)
	}
	for _, r := range p.Refusals {
		one := plannedRefusal{Gas: r.Gas, Why: r.Why, Needs: plannedLimits(r.Needs), Nearest: wavelengthNM(r.Nearest.Emission)}
		if len(r.Needs) > 0 {
			one.Pressure, one.Energy = known(r.Pressure.Bar()), known(r.Energy.Microjoules())
		}
		o.Refusals = append(o.Refusals, one)
	}
	return o
}

func known(v float64) *number {
	n := number(v)
	return &n
}

func plannedOne(c plan.Choice, tolerance unit.Metre) plannedChoice {
	o := plannedChoice{
		Gas: c.Gas, Answer: c.Answer.String(), Pressure: number(c.Pressure.Bar()),
		PressureRange: [2]number{number(c.From.Bar()), number(c.To.Bar())},
		Energy:        number(c.Energy.Microjoules()),
		EnergyRange:   [2]number{number(c.EnergyFrom.Microjoules()), number(c.EnergyTo.Microjoules())},
		Covers:        [2]number{number(c.Covers.From.Nanometres()), number(c.Covers.To.Nanometres())}, Whole: c.Whole,
		Emission: wavelengthNM(c.Prediction.Emission), Sigma: wavelengthNM(c.Prediction.Sigma),
		Margin: number(100 * c.Narrowest.Margin), Narrowest: c.Narrowest.Name,
		PerPressure: number(c.PerPressure * 1e11), PerTemperature: number(c.PerTemperature * 1e9),
		Limits: plannedLimits(c.Limits),
	}
	if c.EnergyKnown {
		o.PerEnergy = known(c.PerEnergy * 1e7)
	}
	if c.PerPressure != 0 {
		o.SteadyPressure = known(plan.Steady(c.PerPressure, tolerance) * 1e-2)
	}
	if c.PerTemperature != 0 {
		o.SteadyTemp = known(plan.Steady(c.PerTemperature, tolerance))
	}
	if f := c.Fill; f != nil {
		o.Fill = &plannedFill{
			Cycles: f.Cycles, Purge: number(f.Purge.Seconds()), Air: number(float64(f.Air) * 1e6), Fill: number(f.Fill.Seconds()),
			Core: number(f.Core.Seconds()), Gas: number(flow.NormLitres(f.Gas)), Why: f.Why,
		}
	}
	return o
}

func plannedLimits(list []plan.Limit) []plannedLimit {
	out := []plannedLimit{}
	for _, l := range list {
		out = append(out, plannedLimit{
			predictedLimit: predictedLimit{l.Name, number(l.Value), number(l.Bound), l.Unit, l.OK, l.Consequence},
			Margin:         number(100 * l.Margin), Hard: l.Hard,
		})
	}
	return out
}

func plannedLightOf(c plan.Confirmed) *plannedLight {
	o := &plannedLight{
		First: wavelengthNM(c.First.Emission), Pressure: number(c.Pressure.Bar()), Emission: wavelengthNM(c.Light.Emission),
		Width: wavelengthNM(c.Light.Width), Conversion: number(100 * float64(c.Light.Conversion)), Ionised: number(c.Light.Ionised),
		Runs: c.Runs, Reliable: c.Light.Reliable, Reasons: append([]string{}, c.Light.Reasons...),
	}
	if c.SlopesKnown {
		o.PerPressure, o.PerEnergy = known(c.PerPressure*1e11), known(c.PerEnergy*1e7)
	}
	return o
}
