// Package bench reads the bench file: bytes in, a typed bench out, every
// mistake named with line and column. It does no I/O.
package bench

import (
	_ "embed"

	"barline/model/limit"
	"barline/model/unit"
)

//go:embed sample.toml
var sample []byte

// Sample returns a commented bench file that Parse accepts: the invented
// bench Heron. The caller owns the slice.
func Sample() []byte { return append([]byte(nil), sample...) }

// Bench is a whole bench file.
type Bench struct {
	Bench      Identity     `toml:"bench"`
	Fibre      Fibre        `toml:"fibre"`
	Gas        Gas          `toml:"gas"`
	Pulse      Pulse        `toml:"pulse"`
	Panel      Panel        `toml:"panel"`
	Limits     Limits       `toml:"limits"`
	Instrument []Instrument `toml:"instrument"`
	Emission   Emission     `toml:"emission"`
	Logbook    Logbook      `toml:"logbook"`
	Alarms     Alarms       `toml:"alarms"`
	Screen     Screen       `toml:"screen"`
}

// Identity is what a later reader needs to know about the bench.
type Identity struct {
	Name                    string `toml:"name"`
	Cylinder                string `toml:"cylinder"`
	FibrePiece              string `toml:"fibre_piece"`
	SpectrometerCalibration string `toml:"spectrometer_calibration"`
}

// Fibre is the hollow fibre. Wall is zero for a capillary.
type Fibre struct {
	Kind         string               `toml:"kind"`
	CoreDiameter unit.Metre           `toml:"core_diameter"`
	Wall         unit.Metre           `toml:"wall"`
	Length       unit.Metre           `toml:"length"`
	Loss         unit.DecibelPerMetre `toml:"loss"`
}

// Gas is what fills the fibre and by which sources it is described.
type Gas struct {
	Species string `toml:"species"`
	Density string `toml:"density"`
	Index   string `toml:"index"`
	N2      string `toml:"n2"`
}

// Pulse is the light at the fibre input.
type Pulse struct {
	Wavelength     unit.Metre         `toml:"wavelength"`
	Duration       unit.Second        `toml:"duration"`
	Shape          string             `toml:"shape"`
	Energy         unit.Joule         `toml:"energy"`
	GDD            unit.SecondSquared `toml:"gdd"`
	RepetitionRate unit.Hertz         `toml:"repetition_rate"`
}

// Panel is the gas panel.
type Panel struct {
	CellVolume unit.CubicMetre `toml:"cell_volume"`
	Supply     unit.Pascal     `toml:"supply"`
	Ambient    unit.Pascal     `toml:"ambient"`
}

// Limits are the bounds of the bench as the file gives them.
type Limits struct {
	FibreSeal    unit.Pascal          `toml:"fibre_seal"`
	Cells        unit.Pascal          `toml:"cells"`
	Windows      unit.Pascal          `toml:"windows"`
	Line         unit.Pascal          `toml:"line"`
	RiseRate     unit.PascalPerSecond `toml:"rise_rate"`
	FallRate     unit.PascalPerSecond `toml:"fall_rate"`
	PumpBelow    unit.Pascal          `toml:"pump_below"`
	Stale        unit.Second          `toml:"stale"`
	Disagreement unit.Pascal          `toml:"disagreement"`
	Arming       unit.Second          `toml:"arming"`
	Follow       unit.Pascal          `toml:"follow"`
}

// Enforced returns the limits that every command is checked against.
func (l Limits) Enforced() limit.Limits {
	return limit.Limits{
		Ratings: []limit.Rating{
			{Part: "fibre seal", Max: l.FibreSeal},
			{Part: "cells", Max: l.Cells},
			{Part: "windows", Max: l.Windows},
			{Part: "line", Max: l.Line},
		},
		RiseRate:  l.RiseRate,
		FallRate:  l.FallRate,
		PumpBelow: l.PumpBelow,
	}
}

// Instrument is one instrument on one line. Exactly one of Port (serial),
// Address (TCP) and Command (a child process) is set.
type Instrument struct {
	Name     string      `toml:"name"`
	Protocol string      `toml:"protocol"` // modbus-rtu | modbus-tcp | scpi | lines
	Port     string      `toml:"port"`
	Address  string      `toml:"address"`
	Command  []string    `toml:"command"`
	Baud     int         `toml:"baud"`
	DataBits int         `toml:"data_bits"`
	Parity   string      `toml:"parity"` // none | even | odd
	StopBits int         `toml:"stop_bits"`
	Every    unit.Second `toml:"every"`   // polling interval
	Timeout  unit.Second `toml:"timeout"` // wall time to wait for an answer
	Streams  bool        `toml:"streams"`
	Pattern  string      `toml:"pattern"`  // lines: named fields in braces
	Checksum string      `toml:"checksum"` // lines: none | xor8 | crc16
	Identify string      `toml:"identify"` // scpi: query that names the instrument
	Hold     []string    `toml:"hold"`     // commands sent on HOLD
	Channel  []Channel   `toml:"channel"`
}

// Channel is one quantity of one instrument.
type Channel struct {
	Name     string   `toml:"name"`
	Role     string   `toml:"role"`
	Unit     int      `toml:"unit"`     // Modbus unit address
	Function int      `toml:"function"` // Modbus function 3 or 4
	Register int      `toml:"register"` // Modbus, counted from 0
	Format   string   `toml:"format"`   // uint16 | int16 | uint32 | int32 | float32
	Order    string   `toml:"order"`    // ABCD | CDAB | BADC | DCBA
	Query    string   `toml:"query"`    // scpi
	Write    string   `toml:"write"`    // scpi, {value} stands for the number
	Field    string   `toml:"field"`    // lines: field of the pattern
	Scale    string   `toml:"scale"`    // the quantity that the number 1 means
	Gauge    bool     `toml:"gauge"`    // pressure above ambient
	Range    []string `toml:"range"`    // lowest and highest value in specification
}

// Emission says how prediction and spectrometer are compared.
type Emission struct {
	Answer      string `toml:"answer"`
	Reports     string `toml:"reports"`
	Wavelengths string `toml:"wavelengths"`
}

// Logbook says where and how densely to record.
type Logbook struct {
	Folder              string      `toml:"folder"`
	Heartbeat           unit.Second `toml:"heartbeat"`
	DeadbandPressure    unit.Pascal `toml:"deadband_pressure"`
	DeadbandTemperature string      `toml:"deadband_temperature"`
	DeadbandWavelength  unit.Metre  `toml:"deadband_wavelength"`
}

// Alarms says whom to call.
type Alarms struct {
	OnAlarm []string `toml:"on_alarm"`
}

// Screen says how to draw.
type Screen struct {
	Background string `toml:"background"`
	TimeZone   string `toml:"time_zone"`
	ASCII      bool   `toml:"ascii"`
}
