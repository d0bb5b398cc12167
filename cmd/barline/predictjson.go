package main

import (
	"math"
	"strconv"

	"barline/model/emission"
	"barline/model/unit"
)

// number is written with ten significant digits, and as null where it is none.
type number float64

func (n number) MarshalJSON() ([]byte, error) {
	v := float64(n)
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return []byte("null"), nil
	}
	text := strconv.AppendFloat(nil, v, 'g', 10, 64)
	short, err := strconv.ParseFloat(string(text), 64)
	if err != nil {
		return nil, err
	}
	return strconv.AppendFloat(nil, short, 'g', -1, 64), nil
}

func wavelengthNM(m unit.Metre) *number {
	if m == 0 {
		return nil
	}
	n := number(m.Nanometres())
	return &n
}

// predictedObject is what predict --json prints.
type predictedObject struct {
	Gas               string            `json:"gas"`
	Pressure          number            `json:"pressure_bar"`
	Temperature       number            `json:"temperature_K"`
	Density           number            `json:"molar_density_mol_m3"`
	Index             number            `json:"index_minus_one"`
	EffectiveIndex    number            `json:"effective_index_minus_one"`
	Beta1             number            `json:"beta1_s_m"`
	Beta2             number            `json:"beta2_fs2_m"`
	Beta3             number            `json:"beta3_fs3_m"`
	ZeroDispersion    []number          `json:"zero_dispersion_nm"`
	Area              number            `json:"effective_area_um2"`
	N2                number            `json:"n2_m2_W"`
	Gamma             number            `json:"gamma_1_W_m"`
	PeakPower         number            `json:"peak_power_W"`
	SolitonOrder      number            `json:"soliton_order"`
	DispersionLength  number            `json:"dispersion_length_m"`
	FissionLength     *number           `json:"fission_length_m"`
	Emission          *number           `json:"emission_nm"`
	EmissionPeak      *number           `json:"emission_peak_nm,omitempty"` // anchored only
	Sigma             *number           `json:"emission_sigma_nm"`
	Why               string            `json:"why,omitempty"`
	Branches          []predictedBranch `json:"branches"`
	Sources           predictedSources  `json:"sources"`
	Limits            []predictedLimit  `json:"limits"`
	Uncertainty       []predictedEffect `json:"uncertainty,omitempty"`
	SteadyWithin02nm  []predictedSteady `json:"steady_for_0.2_nm,omitempty"`
	SourceDescription *predictedTexts   `json:"citations,omitempty"`
}

type predictedBranch struct {
	Emission   *number `json:"emission_nm"`
	Conversion *number `json:"conversion_percent"`
}

type predictedSources struct {
	Density  string `json:"density"`
	Index    string `json:"index"`
	N2       string `json:"n2"`
	Plasma   string `json:"plasma"`
	Emission string `json:"emission"`
	// Calibration laid over the anchored answer; Beyond: outside its data.
	Calibration string `json:"calibration,omitempty"`
	Beyond      bool   `json:"beyond_calibration,omitempty"`
}

type predictedLimit struct {
	Name        string `json:"name"`
	Value       number `json:"value"`
	Bound       number `json:"bound"`
	Unit        string `json:"unit"`
	OK          bool   `json:"ok"`
	Consequence string `json:"consequence"`
}

type predictedEffect struct {
	Name   string `json:"name"`
	Input  string `json:"input_sigma,omitempty"`
	Effect number `json:"effect_nm"`
	Rough  bool   `json:"rough,omitempty"`
}

type predictedSteady struct {
	Name   string `json:"name"`
	Within string `json:"within"`
}

type predictedTexts struct {
	Density string `json:"density"`
	Index   string `json:"index"`
	N2      string `json:"n2"`
}

// predicted turns a prediction into what --json prints.
func predicted(p *emission.Predictor, pr emission.Prediction, explain bool) predictedObject {
	m, s := p.Medium(), p.Setup()
	o := predictedObject{
		Gas: m.Name(), Pressure: number(pr.Input.Pressure.Bar()), Temperature: number(pr.Input.Temperature),
		Density: number(pr.Density), Index: number(pr.IndexMinusOne), EffectiveIndex: number(pr.EffectiveIndexMinusOne),
		Beta1: number(pr.Beta1), Beta2: number(pr.Beta2 * 1e30), Beta3: number(pr.Beta3 * 1e45),
		ZeroDispersion: []number{}, Area: number(pr.EffectiveArea * 1e12), N2: number(pr.N2), Gamma: number(pr.Gamma),
		PeakPower: number(pr.PeakPower), SolitonOrder: number(pr.SolitonOrder), DispersionLength: number(pr.DispersionLength),
		Emission: wavelengthNM(pr.Emission), EmissionPeak: wavelengthNM(pr.Peak), Sigma: wavelengthNM(pr.Sigma), Why: pr.Why,
		Branches: []predictedBranch{}, Limits: []predictedLimit{},
		Sources: predictedSources{m.DensitySource().Name, m.IndexSource().Name, m.KerrSource().Name, s.Plasma.String(), pr.Answer.String(), pr.Calibration, pr.Beyond},
	}
	for _, z := range pr.ZeroDispersion[:pr.ZeroDispersionCount] {
		o.ZeroDispersion = append(o.ZeroDispersion, number(z.Nanometres()))
	}
	if pr.FissionLength > 0 {
		n := number(pr.FissionLength)
		o.FissionLength = &n
	}
	for _, b := range pr.Branches[:pr.BranchCount] {
		branch := predictedBranch{Emission: wavelengthNM(b.Emission)}
		if b.Conversion > 0 {
			n := number(100 * float64(b.Conversion))
			branch.Conversion = &n
		}
		o.Branches = append(o.Branches, branch)
	}
	for _, v := range pr.Verdicts[:pr.VerdictCount] {
		o.Limits = append(o.Limits, predictedLimit{v.Name, number(v.Value), number(v.Bound), v.Unit, v.OK, v.Consequence})
	}
	if explain {
		for _, c := range p.Breakdown(pr) {
			o.Uncertainty = append(o.Uncertainty, predictedEffect{c.Name, c.Input, number(c.Effect.Nanometres()), c.Rough})
		}
		for _, st := range p.Steadiness(pr, steadyFor) {
			o.SteadyWithin02nm = append(o.SteadyWithin02nm, predictedSteady{st.Quantity.String(), st.Text})
		}
		o.SourceDescription = &predictedTexts{m.DensitySource().Citation, m.IndexSource().Citation, m.KerrSource().Citation}
	}
	return o
}

// steadyFor is the tolerance of the inverse question.
const steadyFor = 0.2 * unit.Nanometre
