package live

import (
	"fmt"
	"strings"
	"time"

	"barline/model/drift"
	"barline/model/unit"
)

type (
	// MeansData is what ten seconds at rest came to. What was not measured,
	// or not usable all the time, is absent.
	MeansData struct {
		PressurePa   float64   `json:"pressure_Pa"` // in the core
		TemperatureK float64   `json:"temperature_K"`
		EnergyJ      float64   `json:"energy_J"`
		EmissionM    float64   `json:"emission_m,omitempty"`
		Residual     *MeanData `json:"residual_m,omitempty"`
		Strength     *MeanData `json:"strength,omitempty"`
		Width        *MeanData `json:"width_m,omitempty"`
		Disagreement *MeanData `json:"cell_a_less_cell_b_Pa,omitempty"`
		Metered      *MeanData `json:"metered_J,omitempty"`
		Warmth       *MeanData `json:"fibre_K,omitempty"`
		Shut         *MeanData `json:"shut_Pa,omitempty"` // at 295.15 K, every valve shut
	}
	// MeanData is a mean and of how many readings.
	MeanData struct {
		Mean     float64 `json:"mean"`
		Readings int     `json:"readings"`
	}
	// DriftData is a verdict on the drift of the light and the numbers that
	// it stood on: from Observed, Slopes, State and Seen the findings can be
	// found again.
	DriftData struct {
		Verdict    string         `json:"verdict"`
		Text       string         `json:"text"`
		By         string         `json:"by,omitempty"`    // what moved most
		Since      *time.Time     `json:"since,omitempty"` // UTC
		RunsAway   bool           `json:"runs_away,omitempty"`
		PressurePa float64        `json:"pressure_Pa"`
		Observed   []ObservedData `json:"observed"`

		Slopes   *drift.Slopes       `json:"slopes,omitempty"`
		Rough    bool                `json:"slopes_rough,omitempty"`
		State    *DriftState         `json:"state,omitempty"`
		Seen     []SeenData          `json:"seen,omitempty"` // steps taken since
		Findings []FindingData       `json:"findings,omitempty"`
		Alike    map[string][]string `json:"alike,omitempty"`
		Steps    []StepOffer         `json:"steps,omitempty"`
	}
	// DriftState is the bench that the causes act on.
	DriftState struct {
		PressurePa         float64 `json:"pressure_Pa"`
		TwoGauges          bool    `json:"two_gauges"`
		EnergyMetered      bool    `json:"energy_metered"`
		TemperatureMetered bool    `json:"temperature_metered"`
	}
	// ObservedData is one observable. Relative ones have the unit "1".
	ObservedData struct {
		Quantity   string  `json:"quantity"`
		Unit       string  `json:"unit"`
		Shift      float64 `json:"shift"`
		Sigma      float64 `json:"sigma"`   // of the shift
		Weighed    float64 `json:"weighed"` // sigma with what moves by itself
		Charted    bool    `json:"charted"`
		Ringing    bool    `json:"ringing,omitempty"`
		QuietMean  float64 `json:"quiet_mean"` // as read
		QuietSigma float64 `json:"quiet_sigma"`
		GroupS     float64 `json:"group_s"`
		GroupSigma float64 `json:"group_sigma"`
		Average    float64 `json:"average,omitempty"`
		Lower      float64 `json:"lower,omitempty"`
		Upper      float64 `json:"upper,omitempty"`
		SumHigh    float64 `json:"sum_high,omitempty"` // share of the threshold
		SumLow     float64 `json:"sum_low,omitempty"`
	}
	// FindingData is one cause.
	FindingData struct {
		Cause       string  `json:"cause"`
		Probability float64 `json:"probability"`
		Amount      float64 `json:"amount"`
		AmountSigma float64 `json:"amount_sigma"`
		Text        string  `json:"text,omitempty"`
		Left        float64 `json:"left_in_sigma"`
	}
	// SeenData is what a step showed.
	SeenData struct {
		Step   string               `json:"step"`
		Effect map[string][]float64 `json:"effect"`
		Doubt  map[string][]float64 `json:"doubt,omitempty"`
		Sigma  []float64            `json:"sigma"`
		Shown  []float64            `json:"shown"`
	}
	// StepOffer is a step that would tell causes apart.
	StepOffer struct {
		Name      string  `json:"name"`
		CostS     float64 `json:"cost_s"`
		Bits      float64 `json:"bits"`
		Certain   float64 `json:"certain"`
		ByHand    bool    `json:"by_hand,omitempty"`
		Procedure string  `json:"procedure,omitempty"`
	}
)

// UnitOf is the unit of an observable's shift.
func UnitOf(o drift.Observable) string {
	switch o {
	case drift.Wavelength:
		return "m"
	case drift.Disagreement:
		return "Pa"
	case drift.Warmth:
		return "K"
	case drift.Decay:
		return "Pa/s"
	}
	return "1"
}

// places of the means in a record.
func (d *MeansData) places() [drift.ObservableCount]**MeanData {
	return [drift.ObservableCount]**MeanData{
		drift.Wavelength: &d.Residual, drift.Strength: &d.Strength, drift.Width: &d.Width, drift.Disagreement: &d.Disagreement,
		drift.Metered: &d.Metered, drift.Warmth: &d.Warmth, drift.Decay: &d.Shut,
	}
}

func meansData(s *State, x drift.Means, emission mean) MeansData {
	d := MeansData{PressurePa: float64(x.Pressure), TemperatureK: float64(s.Prediction.Input.Temperature), EnergyJ: float64(s.Prediction.Input.Energy)}
	if emission.n > 0 && x.Count[drift.Wavelength] > 0 {
		d.EmissionM = emission.value
	}
	for o, into := range d.places() {
		if x.Count[o] > 0 {
			*into = &MeanData{x.Value[o], x.Count[o]}
		}
	}
	return d
}

// Means returns what the record holds, as of a bench time.
func (d MeansData) Means(at time.Duration) drift.Means {
	x := drift.Means{At: at, Pressure: unit.Pascal(d.PressurePa)}
	for o, from := range d.places() {
		if m := *from; m != nil {
			x.Value[o], x.Count[o] = m.Mean, m.Readings
		}
	}
	return x
}

// String returns the means in words.
func (d MeansData) String() string {
	var parts []string
	if d.EmissionM > 0 {
		parts = append(parts, fmt.Sprintf("emission %.3f nm", d.EmissionM*1e9))
	}
	if d.Residual != nil {
		parts = append(parts, fmt.Sprintf("residual %+.3f nm", d.Residual.Mean*1e9))
	}
	if d.Strength != nil {
		parts = append(parts, fmt.Sprintf("strength %.3f %%", d.Strength.Mean*100))
	}
	if d.Width != nil {
		parts = append(parts, fmt.Sprintf("width %.2f nm", d.Width.Mean*1e9))
	}
	return unit.Pascal(d.PressurePa).String() + ": " + strings.Join(parts, ", ")
}

// String returns the verdict in words.
func (d DriftData) String() string {
	if d.Text == "" {
		return d.Verdict
	}
	return d.Verdict + ": " + d.Text
}
