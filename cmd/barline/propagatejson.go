package main

import (
	"encoding/csv"
	"io"

	"barline/model/pulse"
)

// propagatedObject is what propagate --json prints: the inputs and what
// follows from them as predict prints them, without the predicted emission,
// then what the run found. Fields here stand over those of the same key.
type propagatedObject struct {
	predictedObject
	Sigma  *number          `json:"emission_sigma_nm,omitempty"`
	Why    string           `json:"why,omitempty"`
	Limits []predictedLimit `json:"limits,omitempty"`

	Sources         propagatedSources `json:"sources"`
	Emission        *number           `json:"emission_nm"`
	EmissionPeak    *number           `json:"emission_peak_nm"`
	EmissionWidth   *number           `json:"emission_width_nm"`
	Conversion      *number           `json:"conversion_percent"`
	Branches        []predictedBranch `json:"branches"`
	EnergyIn        number            `json:"energy_in_uJ"`
	EnergyOut       number            `json:"energy_out_uJ"`
	Ultraviolet     number            `json:"ultraviolet_uJ"`
	Compression     number            `json:"compression_m"`
	CompressedPower number            `json:"compressed_peak_power_W"`
	Ionised         number            `json:"ionised_fraction"`
	Balance         number            `json:"energy_balance"`
	Edge            number            `json:"edge_energy"`
	Steps           int               `json:"steps"`
	Evaluations     int               `json:"evaluations"`
	GridPoints      int               `json:"grid_points"`
	Tolerance       number            `json:"tolerance"`
	Seconds         number            `json:"seconds"`
	Reliable        bool              `json:"reliable"`
	Reasons         []string          `json:"reasons"`
	Notes           []string          `json:"notes"`
}

// propagatedSources leaves out how emission was predicted: it was not.
type propagatedSources struct {
	Density string `json:"density"`
	Index   string `json:"index"`
	N2      string `json:"n2"`
	Plasma  string `json:"plasma"`
}

// object turns a run into what --json prints.
func (d *propagated) object() propagatedObject {
	r := d.result
	o := propagatedObject{
		predictedObject: predicted(d.from.predictor, d.prediction, false),
		Branches:        []predictedBranch{},
		EnergyIn:        number(r.EnergyIn.Microjoules()),
		EnergyOut:       number(r.EnergyOut.Microjoules()),
		Ultraviolet:     number(r.Ultraviolet.Microjoules()),
		Compression:     number(r.Compression),
		CompressedPower: number(r.CompressedPower),
		Ionised:         number(r.Ionised),
		Balance:         number(r.Balance),
		Edge:            number(max(r.TimeEdge, r.BandEdge)),
		Steps:           r.Steps,
		Evaluations:     r.Evaluated,
		GridPoints:      r.Grid.Points,
		Tolerance:       number(r.Tolerance),
		Seconds:         number(d.seconds),
		Reliable:        r.Reliable,
		Reasons:         append([]string{}, r.Reasons...),
		Notes:           append([]string{}, r.Notes...),
	}
	from := o.predictedObject.Sources
	o.Sources = propagatedSources{from.Density, from.Index, from.N2, from.Plasma}
	if l, ok := r.Emission(); ok {
		o.Emission, o.EmissionPeak, o.EmissionWidth = wavelengthNM(l.Centroid), wavelengthNM(l.Peak), wavelengthNM(l.Width)
		share := number(100 * l.Conversion)
		o.Conversion = &share
	}
	for _, l := range r.Lobes {
		share := number(100 * l.Conversion)
		o.Branches = append(o.Branches, predictedBranch{wavelengthNM(l.Centroid), &share})
	}
	return o
}

// writeSpectrum prints the spectrum at the end of the fibre, the shortest
// wavelength first.
func writeSpectrum(w io.Writer, r *pulse.Result) error {
	out := csv.NewWriter(w)
	if err := out.Write([]string{"wavelength_nm", "energy_nJ_nm", "energy_J_s"}); err != nil {
		return err
	}
	const perNanometre = 1e9 * 1e-9 // J/m in nJ/nm
	for i := len(r.Output.Energy) - 1; i >= 0; i-- {
		err := out.Write([]string{
			digits(r.Output.Wavelength(i).Nanometres(), 8),
			digits(r.Output.PerWavelength(i)*perNanometre, 6),
			digits(r.Output.Energy[i], 6),
		})
		if err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}
