package pulse

import (
	"context"
	"errors"
	"fmt"
	"math"

	"barline/model/fibre"
	"barline/model/pulse/fourier"
	"barline/model/spectrum"
	"barline/model/unit"
)

// Options says how a setup is propagated. The zero value is the default.
type Options struct {
	// Tolerance is the relative error allowed in one step; 0 means
	// DefaultTolerance.
	Tolerance float64
	// Samples is the number of places along the fibre at which Evolution is
	// kept.
	Samples int
	// Grid is the sampling; its zero value means that it is chosen from the
	// setup.
	Grid Grid
	// Progress is called after every step with the share of the fibre that is
	// done; nil means nobody asks.
	Progress func(share float64)

	planned func(int) (*fourier.Real, error) // nil means fourier.NewReal
}

// DefaultTolerance gives the centroid of the emission within 0.3 nm of the
// converged one.
const DefaultTolerance = 2e-4

// ErrWindow is wrapped where the time window is so short that the light meets
// itself at its ends: what follows would take long and mean nothing.
var ErrWindow = errors.New("the time window is too short for this pulse")

// hopelessEdge is the share of energy at the ends of time at which a run ends.
const hopelessEdge = 0.2

// Result is what became of the light.
type Result struct {
	Setup     Setup
	Grid      Grid
	Tolerance float64

	Output spectrum.Density // energy in J per rad/s
	Power  []float64        // W of the envelope over the instants of Grid
	Lobes  []spectrum.Lobe  // the emission first; none where nothing is emitted

	EnergyIn, EnergyOut unit.Joule
	Ultraviolet         unit.Joule // at wavelengths below 400 nm
	Compression         unit.Metre // where the envelope peaks highest
	CompressedPower     unit.Watt  // there
	PulsePower          unit.Watt  // of the envelope at the input
	Ionised             float64    // largest share of atoms along the fibre

	Balance    float64 // energy that went missing, over the input
	TimeEdge   float64 // largest share of energy at the ends of time
	BandEdge   float64 // largest share of energy at the edges of the band
	Steps      int
	Evaluated  int
	Evolution  []Sample
	Reliable   bool
	Reasons    []string // why it is not to be trusted, one line each
	Notes      []string // what to know beside it
	peakField  float64  // V/m, largest along the fibre
	tableField float64  // V/m, top of the ionisation table
	region     fibre.Region
}

// Sample is the light at one place along the fibre.
type Sample struct {
	Position unit.Metre
	Energy   []float64 // J per rad/s in the kept bins
	Peak     unit.Watt // of the envelope
	Ionised  float64   // share of atoms behind the pulse
}

// Emission returns the emission and whether there is one.
func (r *Result) Emission() (spectrum.Lobe, bool) {
	if len(r.Lobes) == 0 {
		return spectrum.Lobe{}, false
	}
	return r.Lobes[0], true
}

// Run propagates the setup to the end of its fibre. It returns the context's
// error as soon as that ends, and ErrWindow where the light meets the ends of
// time. Where light reaches the ends of a window or the short-wave end of a
// band that nobody asked for, it starts again with more room.
func (s Setup) Run(ctx context.Context, o Options) (*Result, error) {
	if o.Grid != (Grid{}) {
		return s.run(ctx, o, o.Grid, false)
	}
	more := room{1, 1}
	g, err := s.Grid()
	if err != nil {
		return nil, err
	}
	for range mostRuns - 1 {
		r, err := s.run(ctx, o, g, true)
		switch {
		case errors.Is(err, errBand):
			more.band *= moreBand
		case errors.Is(err, errWindow):
			more.time *= 2
		default:
			return r, err
		}
		next, err := s.grid(more)
		if err != nil || next == g {
			break
		}
		g = next
	}
	return s.run(ctx, o, g, false)
}

// These end a run that can start again with more room.
var (
	errBand   = errors.New("light reached the short-wave end of the band")
	errWindow = errors.New("light reached the ends of the time window")
)

// run propagates the setup on one grid. With keen it gives up with errBand or
// errWindow.
func (s Setup) run(ctx context.Context, o Options, g Grid, keen bool) (*Result, error) {
	m, region, err := s.Medium(g)
	if err != nil {
		return nil, err
	}
	in, err := s.launch(g, m)
	if err != nil {
		return nil, err
	}
	if o.Tolerance == 0 {
		o.Tolerance = DefaultTolerance
	}
	if o.planned == nil {
		o.planned = fourier.NewReal
	}
	solver, err := newSolver(g, m, in, o.Tolerance, o.planned)
	if err != nil {
		return nil, err
	}
	w, err := newWatch(solver, o.Samples)
	if err != nil {
		return nil, err
	}
	r := &Result{Setup: s, Grid: g, Tolerance: o.Tolerance, EnergyIn: unit.Joule(solver.Energy()), region: region}
	for _, a := range m.Atoms {
		if r.tableField == 0 || a.Rate.high < r.tableField {
			r.tableField = a.Rate.high
		}
	}
	r.PulsePower = unit.Watt(w.envelope())
	w.look()
	if r.tableField > 0 && w.peak > r.tableField {
		return nil, fmt.Errorf("pulse of %v: its field of %.2g V/m ionises everything at the input, and ionisation rates end at %.2g V/m",
			s.Pulse.Energy, w.peak, r.tableField)
	}
	for done := false; !done; {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if done, err = solver.Advance(); err != nil {
			return nil, fmt.Errorf("propagation: %w", err)
		}
		w.look()
		switch {
		case keen && w.shortEdge > mostBandEdge:
			return nil, errBand
		case keen && w.timeEdge > mostTimeEdge:
			return nil, errWindow
		}
		if w.timeEdge > hopelessEdge {
			return nil, fmt.Errorf("propagation: %w: after %v %.0f %% of the energy is at the ends of %.0f fs",
				ErrWindow, unit.Metre(solver.Position()), 100*w.timeEdge, g.Window().Femtoseconds())
		}
		if o.Progress != nil {
			o.Progress(solver.Position() / m.Length)
		}
	}
	return r, r.finish(solver, w)
}

func (s Setup) launch(g Grid, m Medium) ([]complex128, error) {
	if s.Measured != nil {
		return s.Measured.launch(g, &m, s.Pulse.Energy)
	}
	return Launch(g, m, s.Pulse)
}

// finish fills in what is known at the end of the fibre.
func (r *Result) finish(s *Solver, w *watch) error {
	w.envelope()
	r.Power = w.power
	r.Output = spectrum.Density{First: r.Grid.Omega(r.Grid.Lo), Spacing: r.Grid.Spacing(), Energy: s.energies()}
	lobes, err := spectrum.Lobes(r.Output, r.Setup.Pulse.Wavelength)
	if err != nil {
		return fmt.Errorf("propagation: %w", err)
	}
	r.Lobes = lobes
	r.EnergyOut = unit.Joule(s.Energy())
	for i, e := range r.Output.Energy {
		if r.Output.Wavelength(i) < 400*unit.Nanometre {
			r.Ultraviolet += unit.Joule(e * r.Output.Spacing)
		}
	}
	r.Compression, r.CompressedPower = unit.Metre(w.bestAt), unit.Watt(w.best)
	r.Ionised = w.ionised
	r.TimeEdge, r.BandEdge = w.timeEdge, w.bandEdge
	r.Balance = (float64(r.EnergyIn-r.EnergyOut) - s.absorbed - s.attenuated) / float64(r.EnergyIn)
	r.Steps, r.Evaluated = s.steps, s.evaluations
	r.Evolution = w.samples
	r.peakField = w.peak
	r.judge()
	return nil
}

// watch follows a solver along the fibre.
type watch struct {
	solver *Solver
	plan   *fourier.Complex
	signal []complex128
	power  []float64

	crest, best, bestAt float64
	ionised, peak       float64
	timeEdge, bandEdge  float64
	shortEdge           float64 // of bandEdge, what is at the short-wave end
	total               int     // samples wanted
	samples             []Sample
}

func newWatch(s *Solver, samples int) (*watch, error) {
	n := s.grid.Points
	plan, err := fourier.NewComplex(n)
	if err != nil {
		return nil, err
	}
	return &watch{solver: s, plan: plan, signal: make([]complex128, n), power: make([]float64, n),
		total: samples, samples: make([]Sample, 0, samples)}, nil
}

// envelope computes the power of the envelope and returns its maximum in W.
func (w *watch) envelope() float64 {
	s := w.solver
	clear(w.signal)
	copy(w.signal[s.grid.Lo:], s.start)
	w.plan.Inverse(w.signal)
	peak := 0.0
	scale := 2 * vacuumPermit * lightSpeed * s.medium.Area
	for i, a := range w.signal {
		w.power[i] = scale * norm2(a)
		peak = max(peak, w.power[i])
	}
	return peak
}

// nearCrest is the share of the highest crest so far from which on the
// envelope, which costs a transform, may be a new highest one.
const nearCrest = 0.7

// look takes note of the light where the solver stands.
func (w *watch) look() {
	s := w.solver
	w.ionised = max(w.ionised, s.pol.ionised)
	w.peak = max(w.peak, s.pol.peak)
	w.edges()
	power := 0.0
	if crest := s.pol.peak * s.pol.peak; crest > nearCrest*w.crest {
		w.crest = max(w.crest, crest)
		power = w.envelope()
		if power > w.best {
			w.best, w.bestAt = power, s.z
		}
	}
	if n := len(w.samples); n < w.total && s.z >= s.medium.Length*float64(n)/float64(max(w.total-1, 1))*(1-1e-12) {
		if power == 0 {
			power = w.envelope()
		}
		w.samples = append(w.samples, Sample{unit.Metre(s.z), s.energies(), unit.Watt(power), s.pol.ionised})
	}
}

// edges follows the share of energy at the ends of time and of the band.
func (w *watch) edges() {
	s := w.solver
	field := s.pol.field
	ends := int(timeEdge * float64(len(field)))
	sum := 0.0
	for i := range ends {
		a, b := field[i], field[len(field)-1-i]
		sum += a*a + b*b
	}
	sum *= vacuumPermit * lightSpeed * s.medium.Area * float64(s.grid.Step)
	w.timeEdge = max(w.timeEdge, sum/s.first)
	bins := int(math.Ceil(bandEdge * float64(len(s.start))))
	low, high := 0.0, 0.0
	for i := range bins {
		low += norm2(s.start[i])
		high += norm2(s.start[len(s.start)-1-i])
	}
	scale := 2 * vacuumPermit * lightSpeed * s.medium.Area * float64(s.grid.Window()) / s.first
	w.bandEdge = max(w.bandEdge, (low+high)*scale)
	w.shortEdge = max(w.shortEdge, high*scale)
}
