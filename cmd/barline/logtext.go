package main

import (
	"encoding/json"
	"fmt"
	"strconv"
	"strings"

	"barline/logbook"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// recordText returns what a record says, in words where its kind is known.
func recordText(r logbook.Record) string {
	var said fmt.Stringer
	var err error
	switch live.Kind(r.Kind) {
	case live.KindReading:
		var d live.ReadingData
		if err = r.Decode(&d); err == nil {
			return readingText(d)
		}
	case live.KindIntent:
		said, err = decoded[live.IntentData](r)
	case live.KindCommand:
		said, err = decoded[live.CommandData](r)
	case live.KindReadback:
		if d, linkErr := decoded[live.LinkData](r); linkErr == nil && d.(live.LinkData).Link != "" {
			return d.String()
		}
		said, err = decoded[live.ReadbackData](r)
	case live.KindAlarm:
		said, err = decoded[live.AlarmData](r)
	case live.KindPrediction:
		said, err = decoded[live.PredictionData](r)
	case live.KindMeans:
		said, err = decoded[live.MeansData](r)
	case live.KindCalibration:
		said, err = decoded[live.CalibrationData](r)
	case live.KindDrift:
		said, err = decoded[live.DriftData](r)
	case live.KindStep:
		said, err = decoded[live.StepData](r)
	case live.KindNote:
		var d noteData
		if err = r.Decode(&d); err == nil {
			return d.String()
		}
	}
	if said != nil && err == nil {
		return said.String()
	}
	return plainObject(r.Data)
}

func decoded[T fmt.Stringer](r logbook.Record) (fmt.Stringer, error) {
	var d T
	err := r.Decode(&d)
	return d, err
}

func readingText(d live.ReadingData) string {
	text := d.Channel
	// Of an instrument that is not measuring, a value would only mislead.
	if d.Value != nil && d.Status != reading.FunctionCheck.String() && d.Status != reading.Failure.String() {
		text += "  " + roleText(d.Role, *d.Value)
	}
	if d.Status != reading.Good.String() {
		text += "  " + d.Status
	}
	if d.Reason != "" {
		text += ": " + d.Reason
	}
	return text
}

// roleText writes the value of a role with its unit.
func roleText(role string, v float64) string {
	r, err := reading.ParseRole(role)
	if err != nil {
		return strconv.FormatFloat(v, 'g', 6, 64) + " (SI)"
	}
	switch {
	case r.IsPressure():
		return unit.Pascal(v).String()
	case r.IsTemperature():
		return unit.Kelvin(v).String()
	}
	switch r {
	case reading.PulseEnergy:
		return fmt.Sprintf("%.4g uJ", unit.Joule(v).Microjoules())
	case reading.Emission, reading.EmissionWidth:
		return fmt.Sprintf("%.2f nm", v*1e9)
	case reading.EmissionStrength, reading.Attenuator:
		return fmt.Sprintf("%.3g %%", v*100)
	case reading.InletValve, reading.PumpValve, reading.VentValve:
		return fmt.Sprintf("%.0f %% open", v*100)
	case reading.LaserOn:
		if v == 0 {
			return "off"
		}
		return "on"
	case reading.ShutterOpen:
		if v == 0 {
			return "shut"
		}
		return "open"
	}
	return strconv.FormatFloat(v, 'g', 6, 64)
}

// plainObject writes a JSON object as members in their order, without braces
// and with long texts cut.
func plainObject(data json.RawMessage) string {
	dec := json.NewDecoder(strings.NewReader(string(data)))
	if _, err := dec.Token(); err != nil {
		return string(data)
	}
	var parts []string
	for dec.More() {
		key, err := dec.Token()
		if err != nil {
			return string(data)
		}
		var value json.RawMessage
		if err := dec.Decode(&value); err != nil {
			return string(data)
		}
		text := string(value)
		var s string
		if json.Unmarshal(value, &s) == nil {
			if text = s; strings.ContainsAny(s, "\n\r") {
				text = fmt.Sprintf("(%d lines)", strings.Count(s, "\n")+1)
			}
		}
		parts = append(parts, fmt.Sprintf("%v %s", key, text))
	}
	return strings.Join(parts, ", ")
}
