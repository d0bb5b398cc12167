package export

import (
	"encoding/json"

	"barline/logbook"
	"barline/model/reading"
)

const timeLayout = "2006-01-02T15:04:05.000000Z"

// fields is what a record of kind reading is made of.
type fields struct {
	Channel string   `json:"channel"`
	Role    string   `json:"role"`
	Value   *float64 `json:"value"`
	Status  string   `json:"status"`
	Reason  string   `json:"reason"`
}

// split returns the fields of a reading, or the data of any other record as
// JSON text.
func split(r logbook.Record) (f fields, data string, err error) {
	if r.Kind != "reading" {
		return f, string(r.Data), nil
	}
	return f, "", r.Decode(&f)
}

// unitOf returns the SI unit that values of a role are in; it is empty for a
// role that has none or is not known.
func unitOf(role string) string {
	r, err := reading.ParseRole(role)
	if err != nil {
		return ""
	}
	switch {
	case r.IsPressure():
		return "Pa"
	case r.IsTemperature():
		return "K"
	}
	switch r {
	case reading.PulseEnergy:
		return "J"
	case reading.Emission, reading.EmissionWidth:
		return "m"
	case reading.EmissionStrength, reading.InletValve, reading.PumpValve, reading.VentValve, reading.ShutterOpen, reading.LaserOn, reading.Attenuator:
		return "1"
	}
	return ""
}

// number writes a JSON value of a record as a field: numbers as they stand,
// text without its quotes, null as nothing.
func number(raw json.RawMessage) string {
	var text string
	switch {
	case len(raw) == 0 || string(raw) == "null":
		return ""
	case json.Unmarshal(raw, &text) == nil:
		return text
	}
	return string(raw)
}
