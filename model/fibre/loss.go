package fibre

import (
	"fmt"
	"math"

	"barline/model/unit"
)

// Loss is the attenuation of the fibre as measured: one value, or a table over
// wavelength. The zero value is a fibre without loss.
type Loss struct {
	Constant unit.DecibelPerMetre
	Table    []LossPoint // ascending in wavelength; used instead of Constant where given
}

// LossPoint is one point of a loss table.
type LossPoint struct {
	Wavelength unit.Metre
	Loss       unit.DecibelPerMetre
}

func (l Loss) check() error {
	if !(l.Constant >= 0) || math.IsInf(float64(l.Constant), 0) {
		return fmt.Errorf("fibre: loss is %g dB/m, expected zero or above", float64(l.Constant))
	}
	for i, p := range l.Table {
		if !(p.Loss >= 0) || !(p.Wavelength > 0) {
			return fmt.Errorf("fibre: loss table has %g dB/m at %v, expected zero or above at a wavelength above zero", float64(p.Loss), p.Wavelength)
		}
		if i > 0 && p.Wavelength <= l.Table[i-1].Wavelength {
			return fmt.Errorf("fibre: loss table goes from %v to %v, expected ascending wavelengths", l.Table[i-1].Wavelength, p.Wavelength)
		}
	}
	return nil
}

// at returns the loss in dB/m at a wavelength in metres: linear between the
// points of a table, its end values beyond.
func (l Loss) at(lambda float64) float64 {
	if len(l.Table) == 0 {
		return float64(l.Constant)
	}
	last := len(l.Table) - 1
	if lambda <= float64(l.Table[0].Wavelength) {
		return float64(l.Table[0].Loss)
	}
	if lambda >= float64(l.Table[last].Wavelength) {
		return float64(l.Table[last].Loss)
	}
	i := 1
	for lambda > float64(l.Table[i].Wavelength) {
		i++
	}
	a, b := l.Table[i-1], l.Table[i]
	x := (lambda - float64(a.Wavelength)) / float64(b.Wavelength-a.Wavelength)
	return float64(a.Loss) + x*float64(b.Loss-a.Loss)
}

// Raised returns the loss with by dB/m added at every wavelength.
func (l Loss) Raised(by unit.DecibelPerMetre) Loss {
	raised := Loss{Constant: l.Constant + by}
	for _, p := range l.Table {
		raised.Table = append(raised.Table, LossPoint{p.Wavelength, p.Loss + by})
	}
	return raised
}

// neperPerDecibel turns dB/m of power into 1/m of power: ln(10)/10.
const neperPerDecibel = math.Ln10 / 10
