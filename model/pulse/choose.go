package pulse

import (
	"fmt"
	"math"

	"barline/model/fibre"
	"barline/model/unit"
)

// The choice of a grid.
const (
	shortestKept = 180 * unit.Nanometre
	belowMatch   = 0.8 // of the phase-matched wavelength, which emission may undercut
	longestKept  = 4 * unit.Micrometre
	pulsesHeld   = 12   // time window over the duration of the stretched pulse
	leastWindow  = 4096 // points
	mostWindow   = 1 << 17
)

// room says by how much a band and a window are made wider than they seemed to
// need: the shortest wavelength is divided by band, the points multiplied by
// time.
type room struct {
	band unit.Metre
	time int
}

// moreBand is by how much a band is widened that light ran out of; a window is
// doubled. mostRuns bounds how often a run starts.
const (
	moreBand = 1.35
	mostRuns = 4
)

// Grid returns a sampling for the setup: a band from 180 nm, or shorter where
// the pump is or emission may be, to 4 µm or the end of guidance, and a time
// window that holds the pulse and what runs away from it. It refuses what would
// need more than 131072 points.
func (s Setup) Grid() (Grid, error) { return s.grid(room{1, 1}) }

// grid returns the sampling with more room, as far as the gas allows.
func (s Setup) grid(more room) (Grid, error) {
	p := s.Pulse
	if !(p.Duration > 0) || !(p.Wavelength > 0) {
		return Grid{}, fmt.Errorf("pulse of %g fs at %g nm: want both above 0", p.Duration.Femtoseconds(), p.Wavelength.Nanometres())
	}
	guide := fibre.Guide{Fibre: s.Fibre, Gas: s.Gas}
	usable := s.Gas.Usable()
	shortest := min(shortestKept, p.Wavelength/3)
	matched := phaseMatched(&guide, p.Wavelength, usable.From)
	if matched > 0 {
		shortest = min(shortest, belowMatch*fibre.Wavelength(matched))
	}
	shortest = max(shortest/more.band, usable.From)
	longest := min(max(longestKept, 3*p.Wavelength), 0.9*guide.CutOff(), usable.To)
	if !(p.Wavelength > shortest && p.Wavelength < longest) {
		return Grid{}, fmt.Errorf("pulse at %v: the gas and the fibre allow %v to %v", p.Wavelength, shortest, longest)
	}
	step := unit.Second(float64(shortest) / (4 * lightSpeed) * 0.9995)
	window := s.window(&guide, matched)
	points := leastWindow
	for float64(points)*float64(step) < window {
		if points *= 2; points > mostWindow {
			return Grid{}, fmt.Errorf("pulse of %g fs with %g fs2 along %v: needs a time window of %.3g ps, more than the %d points that this grid takes",
				p.Duration.Femtoseconds(), float64(p.GDD)*1e30, s.Fibre.Spec().Length, window*1e12, mostWindow)
		}
	}
	return NewGrid(min(points*more.time, mostWindow), step, shortest, longest)
}

// window returns the length of time in s that the light needs: the stretched
// pulse many times, and the delay that light of the phase-matched angular
// frequency, if there is one, gathers behind the pump over the last two thirds
// of the fibre, in the part of the window that lies behind the pulse.
func (s Setup) window(guide *fibre.Guide, matched float64) float64 {
	p := s.Pulse
	tau := float64(p.Duration)
	chirp := 4 * math.Ln2 * float64(p.GDD) / (tau * tau)
	window := pulsesHeld * tau * math.Sqrt(1+chirp*chirp)
	if matched > 0 {
		lag := math.Abs(guide.At(matched).Beta1 - guide.At(fibre.Frequency(p.Wavelength)).Beta1)
		window = max(window, lag*float64(s.Fibre.Spec().Length)*2/3/0.64)
	}
	return window
}

// phaseMatched returns the highest angular frequency, up to that of the
// shortest wavelength, at which the linear phase mismatch with the pump passes
// from negative to positive, sought in 1 % steps downwards; 0 if there is none.
func phaseMatched(guide *fibre.Guide, pump, shortest unit.Metre) float64 {
	omega0 := fibre.Frequency(pump)
	at := guide.At(omega0)
	mismatch := func(omega float64) (float64, bool) {
		far := guide.At(omega)
		return far.Beta - at.Beta - at.Beta1*(omega-omega0), far.Region == fibre.Guided
	}
	above, held := mismatch(fibre.Frequency(shortest))
	for omega := fibre.Frequency(shortest) / 1.01; omega > 1.3*omega0; omega /= 1.01 {
		d, guided := mismatch(omega)
		if held && guided && d < 0 && above >= 0 {
			return omega
		}
		above, held = d, guided
	}
	return 0
}
