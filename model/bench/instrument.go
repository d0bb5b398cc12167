package bench

import (
	"barline/model/reading"
	"barline/model/unit"
)

// Protocols of an instrument.
const (
	ModbusRTU = "modbus-rtu"
	ModbusTCP = "modbus-tcp"
	SCPI      = "scpi"
	Lines     = "lines"
)

// Instrument is one instrument on one line. Exactly one of Port (serial),
// Address (TCP) and Command (a child process) is set. Fields of other lines
// and other protocols are zero.
type Instrument struct {
	Name     string      `toml:"name" form:"required"`
	Protocol string      `toml:"protocol" form:"required; oneof=modbus-rtu|modbus-tcp|scpi|lines"`
	Port     string      `toml:"port"`
	Address  string      `toml:"address"` // host:port
	Command  []string    `toml:"command"`
	Baud     int         `toml:"baud" form:"least=50; most=4000000"`
	DataBits int         `toml:"data_bits" form:"least=5; most=8"`
	Parity   string      `toml:"parity" form:"oneof=none|even|odd"`
	StopBits int         `toml:"stop_bits" form:"least=1; most=2"`
	Every    unit.Second `toml:"every" form:"least=1 ms; most=1 h"`     // polling interval, bench time; 0 where it streams
	Timeout  unit.Second `toml:"timeout" form:"least=1 ms; most=5 min"` // wall time to wait for an answer
	Streams  bool        `toml:"streams"`                               // talks by itself
	Pattern  string      `toml:"pattern"`                               // lines: named fields in braces
	Checksum string      `toml:"checksum" form:"oneof=none|xor8|crc16"` // lines
	Identify string      `toml:"identify"`                              // scpi: query that names the instrument and tells its answers apart; none where it has none
	Hold     []string    `toml:"hold"`                                  // commands sent on HOLD, in order
	Resume   []string    `toml:"resume"`                                // commands sent before the first setpoint after a HOLD

	// Of an instrument that sends whole spectra, as a list in its pattern.
	Calibration []string `toml:"calibration"` // wavelength of pixel i is c0 + c1 i + c2 i² + …, as written
	Dark        float64  `toml:"dark"`        // counts of a pixel without light
	Threshold   float64  `toml:"threshold"`   // counts above dark that the highest pixel must reach
	Saturation  float64  `toml:"saturation"`  // counts at which a pixel is full; 0 where not known

	Terminator string      `toml:"terminator" form:"oneof=lf|crlf|cr"`     // scpi, lines: what is sent; any is understood. Default lf
	Ask        string      `toml:"ask"`                                    // lines: text that asks for a line; without it the instrument streams
	Errors     string      `toml:"errors"`                                 // scpi: query of the error queue, sent after each write
	Turnaround unit.Second `toml:"turnaround" form:"least=0 ms; most=1 s"` // RS-485: silence before each message, wall time
	Echo       bool        `toml:"echo"`                                   // RS-485: the converter sends our own bytes back
	Traffic    string      `toml:"traffic"`                                // file that keeps every byte, for diagnosis

	Channel []Channel `toml:"channel"`
}

// Channel is one quantity of one instrument. The number on the wire becomes a
// quantity by SI; Factor, Zero, Low, High and Symbol are filled in by Parse
// from the texts of the file.
type Channel struct {
	Name     string       `toml:"name" form:"required"`
	Role     reading.Role `toml:"role" form:"default=none"`
	Unit     int          `toml:"unit" form:"least=1; most=247"`       // Modbus unit address
	Function int          `toml:"function" form:"least=3; most=4"`     // Modbus function 3 or 4
	Register int          `toml:"register" form:"least=0; most=65535"` // Modbus, counted from 0
	Format   string       `toml:"format" form:"oneof=uint16|int16|uint32|int32|float32"`
	Order    string       `toml:"order" form:"oneof=ABCD|CDAB|BADC|DCBA"` // bytes of the number, A the most significant
	Query    string       `toml:"query"`                                  // scpi
	Write    string       `toml:"write"`                                  // scpi: command; modbus: {value} alone, to the same register. {value} stands for the number
	Field    string       `toml:"field"`                                  // lines: field of the pattern
	Scale    string       `toml:"scale"`                                  // what the number grows by from 0 to 1, as written
	Offset   string       `toml:"offset"`                                 // the quantity that the number 0 means, as written
	Gauge    bool         `toml:"gauge"`                                  // pressure above ambient
	Range    []string     `toml:"range"`                                  // lowest and highest value in specification, as written

	Span       []string    `toml:"span"`                              // instead of scale: the number is a current, and these are the quantities at 4 mA and at 20 mA, as written
	Current    string      `toml:"current"`                           // with span: the current that the number 1 means, as written; default 1 mA
	GasFactor  float64     `toml:"gas_factor"`                        // multiplies the reading of a gauge that depends on the gas; 0 is none
	Resolution string      `toml:"resolution"`                        // a setpoint read back this near to the one sent was taken, as written
	Stale      unit.Second `toml:"stale" form:"least=1 ms; most=1 h"` // instead of that of [limits], for a pressure only if shorter; 0 is that

	Factor    float64 // SI per count
	Zero      float64 // SI at the number 0; above ambient where Gauge
	Low, High float64 // SI, the range in specification; above ambient where Gauge. Equal where no range is given
	Milliamp  float64 // mA per count; 0 where no span is given
	Step      float64 // SI, the resolution; 0 where none is given
	Symbol    string  // unit that SI returns, such as "Pa"
}

// SI returns the quantity that a number on the wire stands for, in Symbol. Of
// a gauge channel it is above ambient still.
func (c *Channel) SI(number float64) float64 { return c.Zero + c.Factor*number }

// Number returns the number on the wire that stands for the quantity si.
func (c *Channel) Number(si float64) float64 { return (si - c.Zero) / c.Factor }

// HasRange reports whether the file gives a range in specification.
func (c *Channel) HasRange() bool { return c.Low < c.High }
