package pulse

import (
	"sync"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/ionise"
	"barline/model/unit"
)

// tableReach is the top of an ionisation table over its threshold: five times
// the field that pulls the barrier down.
const tableReach = 30

// Rates are the ionisation rates of gases under a pump. Each takes a tenth of
// a second to make, when it is first asked for, and then serves every run with
// the same pump, plasma and mode. Goroutines may share them.
type Rates struct {
	key ratesKey

	mu     sync.Mutex
	tables map[*gas.Species]*RateTable
}

// ratesKey is what the rates depend on besides the gas.
type ratesKey struct {
	wavelength unit.Metre
	plasma     Plasma
	order      int
	zero       float64
}

func newRates(s Setup) *Rates {
	return &Rates{key: s.ratesKey(), tables: make(map[*gas.Species]*RateTable)}
}

func (s Setup) ratesKey() ratesKey {
	order, zero := s.Fibre.Profile()
	return ratesKey{s.Pulse.Wavelength, s.Plasma, order, zero}
}

// Prepare returns the setup with its ionisation rates made, for setups that
// are copied and run many times.
func (s Setup) Prepare() (Setup, error) {
	if !s.Rates.serve(s) {
		s.Rates = newRates(s)
	}
	for _, c := range s.Gas.Components() {
		if _, err := s.Rates.of(c.Species); err != nil {
			return s, err
		}
	}
	return s, nil
}

// serve reports whether the rates hold for the setup; nil ones do not.
func (r *Rates) serve(s Setup) bool { return r != nil && r.key == s.ratesKey() }

// of returns the rates of one gas.
func (r *Rates) of(s *gas.Species) (*RateTable, error) {
	r.mu.Lock()
	defer r.mu.Unlock()
	if t := r.tables[s]; t != nil {
		return t, nil
	}
	rate, err := ionise.NewRate(s.IonisationEnergy, s.OrbitalMomentum, fibre.Frequency(r.key.wavelength))
	if err != nil {
		return nil, err
	}
	profile := ionise.Profile{Order: r.key.order, Zero: r.key.zero}
	electrons := ionise.NewTable(rate, profile, ionise.Uniform)
	losses := electrons
	if r.key.plasma == Radial {
		electrons = ionise.NewTable(rate, profile, ionise.Electrons)
		losses = ionise.NewTable(rate, profile, ionise.Losses)
	}
	low := electrons.Threshold()
	t, err := NewRateTable(low, low*tableReach, func(field float64) (float64, float64) {
		return electrons.Rate(field), losses.Rate(field)
	})
	if err != nil {
		return nil, err
	}
	r.tables[s] = t
	return t, nil
}
