package pulse

import "barline/model/unit"

// Shape is the temporal shape of the transform-limited pulse.
type Shape uint8

const (
	Sech2 Shape = iota
	Gauss
)

// Pulse is the light at the fibre input. Duration is the full width at half
// maximum of the transform-limited pulse; GDD is applied to that pulse.
type Pulse struct {
	Wavelength unit.Metre // vacuum
	Duration   unit.Second
	Shape      Shape
	Energy     unit.Joule // in the fibre
	GDD        unit.SecondSquared
}
