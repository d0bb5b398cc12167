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
	Drift      Drift        `toml:"drift"`
	Alarms     Alarms       `toml:"alarms"`
	Screen     Screen       `toml:"screen"`
}

// Identity is what a later reader needs to know about the bench.
type Identity struct {
	Name                    string `toml:"name" form:"required"`
	Cylinder                string `toml:"cylinder"`
	FibrePiece              string `toml:"fibre_piece"`
	SpectrometerCalibration string `toml:"spectrometer_calibration"`
}

// Fibre is the hollow fibre. Wall is zero for a capillary. CladdingHoles is
// zero where the cladding is solid, shut, or not to be computed.
type Fibre struct {
	Kind         string               `toml:"kind" form:"required; oneof=capillary|kagome|antiresonant"`
	CoreDiameter unit.Metre           `toml:"core_diameter" form:"required; above=0 um; most=2 mm"`
	Wall         unit.Metre           `toml:"wall" form:"above=0 nm; most=100 um"`
	Length       unit.Metre           `toml:"length" form:"required; above=0 cm; most=1000 m"`
	Loss         unit.DecibelPerMetre `toml:"loss" form:"default=0 dB/m; least=0 dB/m"`

	CladdingHoles        int        `toml:"cladding_holes" form:"least=1; most=1000"`
	CladdingHoleDiameter unit.Metre `toml:"cladding_hole_diameter" form:"above=0 um; most=1 mm"`
}

// Gas is what fills the fibre and by which sources it is described. Index and
// N2 are empty where the file leaves the source to the gas.
type Gas struct {
	Species string `toml:"species" form:"required; oneof=helium|neon|argon|krypton|xenon|nitrogen"`
	Density string `toml:"density" form:"default=virial; oneof=reference|virial|ideal"`
	Index   string `toml:"index"`
	N2      string `toml:"n2"`
	// Air is what the last purge left, as far as it is known.
	Air unit.Fraction `toml:"air" form:"default=0 %; least=0 %; most=100 %"`
	// SupplyAir is the air in the gas supplied.
	SupplyAir unit.Fraction `toml:"supply_air" form:"default=0 %; least=0 %; most=50 %"`
}

// Pulse is the light at the fibre input.
type Pulse struct {
	Wavelength     unit.Metre         `toml:"wavelength" form:"required; least=200 nm; most=10 um"`
	Duration       unit.Second        `toml:"duration" form:"required; above=0 fs; most=100 ps"`
	Shape          string             `toml:"shape" form:"default=sech2; oneof=sech2|gauss"`
	Energy         unit.Joule         `toml:"energy" form:"required; above=0 uJ; most=1 J"`
	FullEnergy     unit.Joule         `toml:"full_energy" form:"above=0 uJ; most=1 J"` // with the attenuator wide open; 0: energy is
	GDD            unit.SecondSquared `toml:"gdd" form:"default=0 fs2"`
	RepetitionRate unit.Hertz         `toml:"repetition_rate" form:"required; above=0 Hz"`
}

// Panel is the gas panel. What is zero is not known: estimates of times then
// take the allowed rates, and what is seen corrects them.
type Panel struct {
	CellVolume unit.CubicMetre `toml:"cell_volume" form:"required; above=0 cm3"`
	Supply     unit.Pascal     `toml:"supply" form:"required; above=0 bar; gauge"`
	Ambient    unit.Pascal     `toml:"ambient" form:"default=1 atm; least=0.3 bar; most=1.2 bar"`

	LineVolume   unit.CubicMetre          `toml:"line_volume" form:"least=0 cm3"` // open to the cells
	Inlet        unit.SonicConductance    `toml:"inlet" form:"above=0 dm3/(s bar)"`
	Vent         unit.SonicConductance    `toml:"vent" form:"above=0 dm3/(s bar)"`
	PumpSpeed    unit.CubicMetrePerSecond `toml:"pump_speed" form:"above=0 L/s"`
	PumpUltimate unit.Pascal              `toml:"pump_ultimate" form:"least=0 Pa"`
	WallTime     unit.Second              `toml:"wall_time" form:"least=0 s; most=1 h"` // gas to wall temperature
}

// Limits are the bounds of the bench as the file gives them. All four ratings
// must be written: a part that is left out would not be protected.
type Limits struct {
	FibreSeal    unit.Pascal          `toml:"fibre_seal" form:"required; above=0 bar; gauge"`
	Cells        unit.Pascal          `toml:"cells" form:"required; above=0 bar; gauge"`
	Windows      unit.Pascal          `toml:"windows" form:"required; above=0 bar; gauge"`
	Line         unit.Pascal          `toml:"line" form:"required; above=0 bar; gauge"`
	RiseRate     unit.PascalPerSecond `toml:"rise_rate" form:"required; above=0 bar/s"`
	FallRate     unit.PascalPerSecond `toml:"fall_rate" form:"required; above=0 bar/s"`
	PumpBelow    unit.Pascal          `toml:"pump_below" form:"default=0 bar; least=0 bar; gauge"` // 0: the pump valve never opens
	Stale        unit.Second          `toml:"stale" form:"default=2 s; above=0 s; most=10 min"`
	Confirm      unit.Second          `toml:"confirm" form:"default=3 s; above=0 s; most=5 min"`
	Disagreement unit.Pascal          `toml:"disagreement" form:"default=150 mbar; above=0 bar"`
	Arming       unit.Second          `toml:"arming" form:"default=120 s; above=0 s; most=1 h"`
	Follow       unit.Pascal          `toml:"follow" form:"default=2 bar; above=0 bar"`
	CautionAbove unit.Pascal          `toml:"caution_above" form:"default=2 bar; least=0 bar; gauge"` // 0: no caution at filling
	Energy       unit.Joule           `toml:"energy" form:"above=0 uJ; most=1 J"`                     // of a pulse in the fibre; 0: the attenuator is never moved
	Zero         unit.Pascal          `toml:"zero" form:"default=50 mbar; least=0 bar"`               // that a gauge may ever be corrected by
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
		PumpBelow: l.PumpBelow, MostEnergy: l.Energy, MostZero: l.Zero,
	}
}

// Emission says how prediction and spectrometer are compared.
type Emission struct {
	Answer      string `toml:"answer" form:"default=estimate; oneof=linear|estimate|anchored"`
	Reports     string `toml:"reports" form:"default=centroid; oneof=centroid|peak"`
	Wavelengths string `toml:"wavelengths" form:"default=vacuum; oneof=vacuum|air"`
}

// Logbook says where and how densely to record. A deadband of zero records
// every reading.
type Logbook struct {
	Folder              string                `toml:"folder"`
	Heartbeat           unit.Second           `toml:"heartbeat" form:"default=60 s; above=0 s; most=1 d"`
	DeadbandPressure    unit.Pascal           `toml:"deadband_pressure" form:"default=2 mbar; least=0 bar"`
	DeadbandTemperature unit.KelvinDifference `toml:"deadband_temperature" form:"default=0.1 K; least=0 K"`
	DeadbandWavelength  unit.Metre            `toml:"deadband_wavelength" form:"default=0.05 nm; least=0 nm"`
	Compress            bool                  `toml:"compress"` // segments that are finished
}

// Drift says what counts as drift of the light. A shift that is smaller than
// these is charted, and nobody is called.
type Drift struct {
	// Learn is the shortest quiet stretch that is learnt from: sixty means of
	// ten seconds, at least.
	Learn      unit.Second          `toml:"learn" form:"default=10 min; least=10 min; most=25 min"`
	FalseAlarm unit.Second          `toml:"false_alarm" form:"default=1000 h; least=10 h; most=100000 h"` // mean time between, of one chart
	Wavelength unit.Metre           `toml:"wavelength" form:"default=0.2 nm; above=0 nm"`
	Strength   unit.Fraction        `toml:"strength" form:"default=5 %; above=0 %"`     // relative
	Width      unit.Fraction        `toml:"width" form:"default=5 %; above=0 %"`        // relative
	Gauges     unit.Pascal          `toml:"gauges" form:"default=10 mbar; above=0 bar"` // cell A less cell B
	Leak       unit.PascalPerSecond `toml:"leak" form:"default=0.01 mbar/s; above=0 bar/s"`
}

// Alarms says whom to call.
type Alarms struct {
	OnAlarm []string `toml:"on_alarm"` // a program and its arguments
}

// Screen says how to draw.
type Screen struct {
	Background string `toml:"background" form:"default=dark; oneof=dark|light"`
	TimeZone   string `toml:"time_zone" form:"default=local"` // local, UTC or a name such as Europe/Lisbon
	ASCII      bool   `toml:"ascii"`
}
