package emission

import (
	"fmt"
	"math"
)

// Quantity is one uncertain input of a prediction. Its standard uncertainty is
// in the unit named beside it.
type Quantity uint8

const (
	Pressure       Quantity = iota // Pa
	Temperature                    // K
	Air                            // share of one
	CoreRadius                     // relative
	Wall                           // relative
	PumpWavelength                 // m
	PulseEnergy                    // relative
	PulseDuration                  // relative
	PulseGDD                       // s²
	NonlinearIndex                 // relative; 0 takes the spread of the gas's sources
	// QuantityCount is the number of quantities, for arrays indexed by them.
	QuantityCount = iota
)

var quantityText = [QuantityCount]string{
	"pressure", "temperature", "air in the gas", "core radius", "wall", "pump wavelength",
	"pulse energy", "pulse duration", "group-delay dispersion", "nonlinear index",
}

// String names the quantity.
func (q Quantity) String() string { return quantityText[q] }

// text writes an amount x of the quantity with its unit.
func (q Quantity) text(x float64) string {
	switch q {
	case Pressure:
		return fmt.Sprintf("%.3g mbar", x/1e2)
	case Temperature:
		return fmt.Sprintf("%.3g K", x)
	case Air:
		if x < 1e-3 {
			return fmt.Sprintf("%.3g ppm", x*1e6)
		}
	case PumpWavelength:
		return fmt.Sprintf("%.3g nm", x*1e9)
	case PulseGDD:
		return fmt.Sprintf("%.3g fs2", x*1e30)
	}
	return fmt.Sprintf("%.3g %%", x*100)
}

// Uncertainty is what is known of the inputs: standard uncertainties, and how
// they go together.
type Uncertainty struct {
	Standard [QuantityCount]float64
	// Correlation holds the coefficients between quantities, −1 to 1. Only
	// pairs off the diagonal are read; the matrix is symmetric.
	Correlation [QuantityCount][QuantityCount]float64
}

// DefaultUncertainty is that of a careful bench before calibration (common
// practice, no source): a transducer good to 10 mbar, a thermometer to half a
// kelvin, a core known to 1 %, a pulse energy to 5 %.
func DefaultUncertainty() Uncertainty {
	return Uncertainty{Standard: [QuantityCount]float64{
		Pressure: 1e3, Temperature: 0.5, Air: 1e-4, CoreRadius: 0.01, Wall: 0.02, PumpWavelength: 1e-9,
		PulseEnergy: 0.05, PulseDuration: 0.05, PulseGDD: 50e-30,
	}}
}

func (u *Uncertainty) check() error {
	for i, s := range u.Standard {
		if !(s >= 0) || math.IsInf(s, 0) {
			return fmt.Errorf("uncertainty of %s is %g, expected zero or above", Quantity(i), s)
		}
	}
	for i := range QuantityCount {
		for j := range i {
			r := u.Correlation[i][j]
			if !(math.Abs(r) <= 1) || r != u.Correlation[j][i] {
				return fmt.Errorf("correlation of %s and %s is %g, expected the same both ways and between -1 and 1", Quantity(i), Quantity(j), r)
			}
		}
	}
	if !u.possible() {
		return fmt.Errorf("correlations contradict each other: no joint distribution has them all")
	}
	return nil
}

// possible reports whether the correlation matrix is positive semidefinite, by
// Cholesky's decomposition.
func (u *Uncertainty) possible() bool {
	var l [QuantityCount][QuantityCount]float64
	for i := range QuantityCount {
		for j := 0; j <= i; j++ {
			sum := u.Correlation[i][j]
			if i == j {
				sum = 1
			}
			for k := range j {
				sum -= l[i][k] * l[j][k]
			}
			if i == j {
				if sum < -1e-12 {
					return false
				}
				l[i][i] = math.Sqrt(math.Max(sum, 0))
			} else if l[j][j] > 1e-9 {
				l[i][j] = sum / l[j][j]
			} else if math.Abs(sum) > 1e-9 {
				return false
			}
		}
	}
	return true
}
