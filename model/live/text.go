package live

import (
	"fmt"
	"strings"

	"barline/model/unit"
)

// The text of a record's data, as a screen or a terminal shows it.

// String returns the intent in words.
func (d IntentData) String() string {
	var b strings.Builder
	b.WriteString(d.Intent)
	if d.TargetPa != nil {
		fmt.Fprintf(&b, " %v", unit.Pascal(*d.TargetPa))
	}
	if d.EmissionM != nil {
		fmt.Fprintf(&b, " %.2f nm", *d.EmissionM*1e9)
	}
	if d.Phase > 0 {
		fmt.Fprintf(&b, " step %d of", d.Phase)
	}
	if d.EnergyJ > 0 {
		fmt.Fprintf(&b, " %v", unit.Joule(d.EnergyJ))
	}
	if d.Caution != "" {
		fmt.Fprintf(&b, " the caution at %s", d.Caution)
	}
	if d.Program != "" {
		fmt.Fprintf(&b, " %q", d.Program)
	}
	if d.Alarm != "" {
		fmt.Fprintf(&b, " %q", d.Alarm)
	}
	if d.Calibration != "" {
		fmt.Fprintf(&b, " calibration %q", d.Calibration)
	}
	if d.Refused != "" {
		fmt.Fprintf(&b, " refused: %s", d.Refused)
	}
	return b.String()
}

// String returns the command in words.
func (d CommandData) String() string {
	if d.Hold {
		return fmt.Sprintf("%d HOLD at %v: %s", d.Command, unit.Pascal(d.SetpointPa), d.Why)
	}
	switch {
	case d.Valve != "" && d.Open != nil && *d.Open:
		return fmt.Sprintf("%d open the %s valve", d.Command, d.Valve)
	case d.Valve != "":
		return fmt.Sprintf("%d shut the %s valve", d.Command, d.Valve)
	case d.EnergyJ != 0:
		return fmt.Sprintf("%d pulse energy %.4g uJ, attenuator at %.1f %%", d.Command, d.EnergyJ*1e6, d.Share*100)
	case d.ZeroOf != "" && d.ShiftPa != nil:
		return fmt.Sprintf("%d zero of %s: %+.4g mbar added to what it reads", d.Command, d.ZeroOf, *d.ShiftPa/100)
	}
	return fmt.Sprintf("%d setpoint %v", d.Command, unit.Pascal(d.SetpointPa))
}

// String returns the answer in words.
func (d ReadbackData) String() string {
	if d.Error != "" {
		return fmt.Sprintf("%d not taken: %s", d.Command, d.Error)
	}
	return fmt.Sprintf("%d taken", d.Command)
}

// String returns the change of the line in words.
func (d LinkData) String() string {
	if d.Reason != "" {
		return fmt.Sprintf("%s is %s: %s", d.Instrument, d.Link, d.Reason)
	}
	return fmt.Sprintf("%s is %s", d.Instrument, d.Link)
}

// String returns the change of the alarm in words.
func (d AlarmData) String() string { return fmt.Sprintf("%s: %s (%s)", d.Name, d.State, d.Cause) }

// String returns what the predictions stand on in words.
func (d NodeData) String() string {
	text := fmt.Sprintf("%s on %d of %d full-field runs", d.Answer, d.Nodes, d.Planned)
	if d.LeftOutM > 0 {
		text += fmt.Sprintf(", error at runs left out %.2f nm rms", d.LeftOutM*1e9)
	}
	return text
}

// String returns the remark.
func (d NoteData) String() string { return d.Text }

// String returns the prediction in words.
func (d PredictionData) String() string {
	if d.EmissionM == nil {
		return fmt.Sprintf("%v: no emission, %s", unit.Pascal(d.PressurePa), d.Why)
	}
	text := fmt.Sprintf("%v: %.2f nm ± %.2f nm (%s)", unit.Pascal(d.PressurePa), *d.EmissionM*1e9, d.SigmaM*1e9, d.Answer)
	if d.Air >= 1e-6 {
		text += ", " + AirText(unit.Fraction(d.Air)) + " of air"
	}
	if d.Calibration != "" {
		text += fmt.Sprintf(", calibration %q", d.Calibration)
	}
	if d.Beyond {
		text += ", beyond its data"
	}
	if d.ResidualM != nil {
		text += fmt.Sprintf(", measured %.2f nm, residual %+.2f nm", *d.MeasuredM*1e9, *d.ResidualM*1e9)
	}
	return text
}

// String returns the row in words.
func (d StepData) String() string {
	text := fmt.Sprintf("%s %d (%s): set %v, measured %v", d.Program, d.Step, d.Label, unit.Pascal(d.SetPa), unit.Pascal(d.MeasuredPa))
	if d.Rise != nil {
		return text + "; " + d.Rise.String()
	}
	if d.PredictedM != nil {
		text += fmt.Sprintf(", predicted %.2f nm", *d.PredictedM*1e9)
	}
	if d.MeasuredM != nil {
		text += fmt.Sprintf(", emission %.2f nm", *d.MeasuredM*1e9)
	}
	if d.ResidualM != nil {
		text += fmt.Sprintf(", residual %+.2f nm over %d readings", *d.ResidualM*1e9, d.Samples)
	}
	if d.Spectrum != nil {
		text += ", " + d.Spectrum.String()
	}
	return text
}

// String says where the spectrum is.
func (d SpectrumData) String() string {
	if d.File == "" {
		return "spectrum not kept: " + d.Missing
	}
	return "spectrum in " + d.File
}

// String returns the verdict of a leak test in words.
func (d RiseData) String() string {
	if d.Text != "" {
		return d.Text
	}
	return "no verdict: " + d.Verdict
}

// AirText writes a share of air in per cent or parts per million.
func AirText(air unit.Fraction) string {
	if air >= 1e-3 {
		return fmt.Sprintf("%.2g %%", float64(air)*100)
	}
	return fmt.Sprintf("%.2g ppm", float64(air)*1e6)
}
