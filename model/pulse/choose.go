package pulse

import (
	"fmt"
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// The choice of a grid.
const (
	shortestKept = 180 * unit.Nanometre // all emission that gases in wide cores make at bar pressures
	longestKept  = 4 * unit.Micrometre
	pulsesHeld   = 12   // time window over the duration of the stretched pulse
	leastWindow  = 4096 // points
	mostWindow   = 1 << 17
)

// Grid returns a sampling for the setup: a band from 180 nm, or shorter where
// the pump is, to 4 µm or the end of guidance, and a time window that holds the
// pulse and what runs away from it. It refuses what would need more than 131072
// points.
func (s Setup) Grid() (Grid, error) {
	p := s.Pulse
	if !(p.Duration > 0) || !(p.Wavelength > 0) {
		return Grid{}, fmt.Errorf("pulse of %g fs at %g nm: want both above 0", p.Duration.Femtoseconds(), p.Wavelength.Nanometres())
	}
	guide := fibre.Guide{Fibre: s.Fibre, Gas: s.Gas}
	usable := s.Gas.Usable()
	shortest := max(min(shortestKept, p.Wavelength/3), usable.From)
	longest := min(max(longestKept, 3*p.Wavelength), 0.9*guide.CutOff(), usable.To)
	if !(p.Wavelength > shortest && p.Wavelength < longest) {
		return Grid{}, fmt.Errorf("pulse at %v: the gas and the fibre allow %v to %v", p.Wavelength, shortest, longest)
	}
	step := unit.Second(float64(shortest) / (4 * lightSpeed) * 0.9995)
	window := s.window(&guide, shortest)
	points := leastWindow
	for float64(points)*float64(step) < window {
		if points *= 2; points > mostWindow {
			return Grid{}, fmt.Errorf("pulse of %g fs with %g fs2 along %v: needs a time window of %.3g ps, more than the %d points that this grid takes",
				p.Duration.Femtoseconds(), float64(p.GDD)*1e30, s.Fibre.Spec().Length, window*1e12, mostWindow)
		}
	}
	return NewGrid(points, step, shortest, longest)
}

// window returns the length of time in s that the light needs: the stretched
// pulse many times, and the delay that light of the linearly phase-matched
// wavelength gathers behind the pump over the last two thirds of the fibre, in
// the part of the window that lies behind the pulse.
func (s Setup) window(guide *fibre.Guide, shortest unit.Metre) float64 {
	p := s.Pulse
	tau := float64(p.Duration)
	chirp := 4 * math.Ln2 * float64(p.GDD) / (tau * tau)
	window := pulsesHeld * tau * math.Sqrt(1+chirp*chirp)
	pump := guide.At(fibre.Frequency(p.Wavelength))
	if omega, ok := phaseMatched(guide, pump, p.Wavelength, shortest); ok {
		lag := math.Abs(guide.At(omega).Beta1 - pump.Beta1)
		window = max(window, lag*float64(s.Fibre.Spec().Length)*2/3/0.64)
	}
	return window
}

// phaseMatched returns the highest angular frequency at which the linear phase
// mismatch passes from negative to positive, sought in 1 % steps downwards.
func phaseMatched(guide *fibre.Guide, pump fibre.Propagation, wavelength, shortest unit.Metre) (float64, bool) {
	omega0 := fibre.Frequency(wavelength)
	mismatch := func(omega float64) (float64, bool) {
		at := guide.At(omega)
		return at.Beta - pump.Beta - pump.Beta1*(omega-omega0), at.Region == fibre.Guided
	}
	above, held := mismatch(fibre.Frequency(shortest))
	for omega := fibre.Frequency(shortest) / 1.01; omega > 1.3*omega0; omega /= 1.01 {
		d, guided := mismatch(omega)
		if held && guided && d < 0 && above >= 0 {
			return omega, true
		}
		above, held = d, guided
	}
	return 0, false
}
