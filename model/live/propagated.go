package live

import (
	"time"

	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// Propagated is what a full-field run says of the light, with the inputs that
// it was made for. It is never changed once it is in a snapshot.
type Propagated struct {
	Input emission.Input
	// Asked is when the inputs were those of the bench.
	Asked reading.Stamp
	Took  time.Duration // wall time of the run
	Err   string        // why there is no spectrum for these inputs

	Wavelength []unit.Metre // vacuum, ascending: middles of bins
	Spectrum   []float64    // J/m, energy per wavelength at the end of the fibre

	Emission, Peak, Width unit.Metre // of the strongest lobe; 0 where none is emitted
	Sigma                 unit.Metre // standard uncertainty of Emission; 0 where not known
	Conversion            unit.Fraction
	Others                []emission.Branch // weaker lobes, strongest first

	EnergyIn, EnergyOut unit.Joule
	Ultraviolet         unit.Joule // below 400 nm
	Compression         unit.Metre // where the pulse is shortest
	CompressedPower     unit.Watt
	Ionised             unit.Fraction // largest along the fibre

	Along []Place      // from the input of the fibre to its end
	Bins  []unit.Metre // of every Place's Spectrum, vacuum, ascending: middles of bins

	Reliable bool
	Reasons  []string // why it is not to be trusted
}

// Place is the light at one place along the fibre.
type Place struct {
	Position    unit.Metre
	Spectrum    []float64 // J/m, energy per wavelength
	Energy      unit.Joule
	Ultraviolet unit.Joule
	Peak        unit.Watt
	Ionised     unit.Fraction // behind the pulse
}

// Propagation says how the full-field runs beside the dashboard fare.
type Propagation struct {
	On    bool           // spectra are computed for this bench
	Why   string         // why not
	Busy  bool           // one is under way
	For   emission.Input // its inputs
	Share float64        // of it that is done, 0 to 1
}
