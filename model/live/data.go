package live

import (
	"barline/model/anchor"
	"barline/model/reading"
)

// The data of each kind of record, as the logbook holds them. Keys carry
// their unit; SI throughout.
type (
	// ReadingData is a reading; Value is null where there is none.
	ReadingData struct {
		Channel string   `json:"channel"`
		Role    string   `json:"role"`
		Value   *float64 `json:"value"` // SI unit of the role
		Status  string   `json:"status"`
		Reason  string   `json:"reason,omitempty"`
	}
	// IntentData is an intent, and why it was refused where it was.
	IntentData struct {
		Intent      string   `json:"intent"`
		TargetPa    *float64 `json:"target_Pa,omitempty"`
		EmissionM   *float64 `json:"emission_m,omitempty"`
		Program     string   `json:"program,omitempty"`
		Phases      int      `json:"phases,omitempty"`
		Phase       int      `json:"phase,omitempty"` // from 1, of "begin"
		EnergyJ     float64  `json:"energy_J,omitempty"`
		Caution     string   `json:"caution,omitempty"`
		Alarm       string   `json:"alarm,omitempty"`
		Refused     string   `json:"refused,omitempty"`
		Calibration string   `json:"calibration,omitempty"`
		// Plan is what a "run" is to do, so that it can be gone on with.
		Plan *Plan `json:"plan,omitempty"`
	}
	// CommandData is a command to the controller, or an order to another
	// instrument; SetpointPa then stays as it was.
	CommandData struct {
		Command    uint64  `json:"command"`
		Hold       bool    `json:"hold,omitempty"`
		SetpointPa float64 `json:"setpoint_Pa"`
		Why        string  `json:"why,omitempty"`

		Valve   string   `json:"valve,omitempty"`
		Open    *bool    `json:"open,omitempty"` // of Valve
		EnergyJ float64  `json:"energy_J,omitempty"`
		Share   float64  `json:"attenuator,omitempty"` // let through, for EnergyJ
		ZeroOf  string   `json:"zero_of,omitempty"`    // channel of a gauge
		ShiftPa *float64 `json:"shift_Pa,omitempty"`   // added to its readings from now on
	}
	// ReadbackData is the controller's answer to a command.
	ReadbackData struct {
		Command uint64 `json:"command"`
		Error   string `json:"error,omitempty"`
	}
	// LinkData is a change of the line to an instrument.
	LinkData struct {
		Instrument string `json:"instrument"`
		Link       string `json:"link"`
		Reason     string `json:"reason,omitempty"`
	}
	// AlarmData is a change of an alarm's state.
	AlarmData struct {
		Name     string `json:"name"`
		State    string `json:"state"`
		Was      string `json:"was"`
		Priority int    `json:"priority"`
		Cause    string `json:"cause"`
	}
	// NodeData says on how many full-field runs the predictions stand now, and
	// holds those that came since the record before, so that the predictions
	// can be derived again from the record alone.
	NodeData struct {
		Answer   string        `json:"answer"`
		Nodes    int           `json:"nodes"` // in all records of the session so far, in their order
		Planned  int           `json:"planned"`
		LeftOutM float64       `json:"left_out_m"` // rms error at nodes left out; 0 where not known
		Runs     []anchor.Node `json:"runs,omitempty"`
	}
	// RiseData is what a leak test showed. Flows are positive into the volume.
	RiseData struct {
		Verdict         string  `json:"verdict"`
		Text            string  `json:"text,omitempty"`
		Readings        int     `json:"readings"`
		TotalPaM3S      float64 `json:"total_Pa_m3_s"`
		TotalSigma      float64 `json:"total_sigma_Pa_m3_s"`
		LeakPaM3S       float64 `json:"leak_Pa_m3_s"`
		LeakSigma       float64 `json:"leak_sigma_Pa_m3_s"`
		OutgassingPaM3S float64 `json:"outgassing_Pa_m3_s"`
		OutgassingSigma float64 `json:"outgassing_sigma_Pa_m3_s"`
	}
	// NoteData is a remark.
	NoteData struct {
		Text string `json:"text"`
	}
	// PredictionData is a prediction and the values that it stood on.
	PredictionData struct {
		PressurePa      float64   `json:"pressure_Pa"`
		TemperatureK    float64   `json:"temperature_K"`
		EnergyJ         float64   `json:"energy_J"`
		Air             float64   `json:"air_fraction,omitempty"`
		Answer          string    `json:"answer"`
		Calibration     string    `json:"calibration,omitempty"`
		Beyond          bool      `json:"beyond_calibration,omitempty"` // outside the range of its data
		ZeroDispersionM []float64 `json:"zero_dispersion_m"`
		EmissionM       *float64  `json:"emission_m"` // null where there is none
		SigmaM          float64   `json:"sigma_m,omitempty"`
		MeasuredM       *float64  `json:"measured_m,omitempty"`
		ResidualM       *float64  `json:"residual_m,omitempty"`
		Why             string    `json:"why,omitempty"`
	}
	// StepData is one row of a run of pressure steps.
	StepData struct {
		Program      string    `json:"program"`
		Step         int       `json:"step"` // phase of the program, from 1
		Label        string    `json:"label"`
		SetPa        float64   `json:"set_Pa"`
		MeasuredPa   float64   `json:"measured_Pa"`
		CorePa       float64   `json:"core_Pa"`
		TemperatureK float64   `json:"temperature_K"`
		EnergyJ      float64   `json:"energy_J"`
		PredictedM   *float64  `json:"predicted_m"`
		MeasuredM    *float64  `json:"measured_m"`
		ResidualM    *float64  `json:"residual_m"`
		ScatterM     float64   `json:"scatter_m"` // standard deviation of one measured emission
		Samples      int       `json:"samples"`   // of the measured emission
		SigmaM       float64   `json:"sigma_m"`
		Status       string    `json:"status"`
		Rise         *RiseData `json:"rise,omitempty"` // of a leak test
		ApartPa      *float64  `json:"cell_a_less_cell_b_Pa,omitempty"`
		RatePaS      *float64  `json:"rate_Pa_s,omitempty"`   // with every valve shut
		Calibration  string    `json:"calibration,omitempty"` // of the prediction
		Beyond       bool      `json:"beyond_calibration,omitempty"`

		Spectrum *SpectrumData `json:"spectrum,omitempty"` // measured during the dwell
	}
	// SpectrumData names a file beside the record that holds a measured
	// spectrum: the mean over a dwell.
	SpectrumData struct {
		File       string `json:"file,omitempty"` // below the logbook's folder
		SHA256     string `json:"sha256,omitempty"`
		Bytes      int    `json:"bytes,omitempty"`
		Instrument string `json:"instrument,omitempty"`
		Spectra    int    `json:"spectra,omitempty"` // that the mean is of
		Missing    string `json:"missing,omitempty"` // why there is no file
	}
)

func (c *Core) predictionData(s *State) PredictionData {
	p := &s.Prediction
	d := PredictionData{
		PressurePa: float64(p.Input.Pressure), TemperatureK: float64(p.Input.Temperature),
		EnergyJ: float64(p.Input.Energy), Air: float64(p.Input.Air),
		Answer: p.Answer.String(), Why: p.Why, Calibration: p.Calibration, Beyond: p.Beyond,
		ZeroDispersionM: make([]float64, p.ZeroDispersionCount),
	}
	for i := range d.ZeroDispersionM {
		d.ZeroDispersionM[i] = float64(p.ZeroDispersion[i])
	}
	if p.Emission != 0 {
		e := float64(p.Emission)
		d.EmissionM, d.SigmaM = &e, float64(p.Sigma)
	}
	if r := s.Reading(reading.Emission, c.stale); r.Status.Usable() {
		d.MeasuredM = &r.Value
		if d.EmissionM != nil {
			residual := r.Value - *d.EmissionM
			d.ResidualM = &residual
		}
	}
	return d
}

// stepData is the row of the phase under way: means over its dwell, or the
// newest values where nothing was sampled.
func (c *Core) stepData(s *State) StepData {
	a, e := s.Reading(reading.CellAPressure, c.stale), s.Reading(reading.Emission, c.stale)
	r := &s.run
	d := StepData{
		Program: r.program.Name, Step: r.program.First + r.index + 1, Label: r.phase().Label,
		SetPa: float64(s.Setpoint), MeasuredPa: a.Value, CorePa: float64(s.Core),
		TemperatureK: float64(s.Prediction.Input.Temperature), EnergyJ: float64(s.Prediction.Input.Energy),
		Samples: r.emission.n, ScatterM: r.emission.deviation(),
		SigmaM: float64(s.Prediction.Sigma), Status: e.Status.String(),
		Calibration: s.Prediction.Calibration, Beyond: s.Prediction.Beyond,
	}
	if r.apart.n > 0 {
		m := r.apart.value
		d.ApartPa = &m
	}
	if elapsed := (s.Now.Mono - r.settledAt).Seconds(); s.Mode == Isolated && elapsed > 0 && r.from > 0 {
		if p, ok := c.pressure(s); ok {
			rate := float64(p-r.from) / elapsed
			d.RatePaS = &rate
		}
	}
	if r.pressure.n > 0 {
		d.MeasuredPa = r.pressure.value
	}
	if s.Prediction.Emission != 0 {
		p := float64(s.Prediction.Emission)
		d.PredictedM = &p
	}
	if r.emission.n > 0 {
		m := r.emission.value
		d.MeasuredM = &m
	}
	if r.residual.n > 0 {
		m := r.residual.value
		d.ResidualM = &m
	}
	return d
}

// isOrder reports whether the command is an order and no setpoint.
func (d CommandData) isOrder() bool { return d.Valve != "" || d.EnergyJ != 0 || d.ZeroOf != "" }
