package loop

import (
	"math"
	"slices"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// profilePoints is how finely a screen sees the pressure along the core.
const profilePoints = 32

// publish builds a snapshot and tells the screen that there is one. Slices of
// the history are shared: the loop only ever appends behind them.
func (l *Loop) publish() {
	s, o := &l.state, &l.opt
	snap := &live.Snapshot{
		Now: s.Now, Bench: o.Bench,
		Mode: s.Mode, Why: s.Why, Notice: s.Notice, ArmedUntil: s.ArmedUntil, Acknowledged: s.Acknowledged(), Unfinished: o.Unfinished,
		Target: s.Target, Setpoint: s.Setpoint, Program: o.Core.Progress(s), Outcome: s.Outcome(),
		Core: s.Core, CoreKnown: s.CoreKnown, Lag: s.Lag, SettleIn: s.SettleIn,
		Profile:    o.Core.Profile(s, make([]unit.Pascal, profilePoints)),
		Prediction: s.Prediction, Residual: s.Residual,
		ResidualKnown: s.ResidualAt != 0 && s.Now.Mono-s.ResidualAt <= o.Core.Stale(),
		Points:        slices.Clip(l.history.points),
		Resonances:    o.Resonances,
		Links:         slices.Clone(s.Links[:s.LinkCount]),
		Alarms:        o.Core.Alarms(s),
		Record:        s.Record, Folder: o.Folder, Recent: slices.Clip(l.history.lines),
		PressureA: l.history.pressure.View(), Expected: l.history.expected.View(), Residuals: l.history.residual.View(),
		Trends: l.history.trends(s.Now.Mono), Rows: slices.Clip(l.history.rows), Marks: slices.Clip(l.history.marks),
		Drift:     o.Core.Drift(s),
		Simulated: o.Simulated, ReadOnly: o.ReadOnly, Dropped: l.dropped,
	}
	for role := range snap.Latest {
		if s.Latest[role].Channel != "" {
			snap.Latest[role] = s.Reading(reading.Role(role), o.Core.Stale())
		}
	}
	snap.Calibrations = s.Calibrations()
	if use := snap.Calibrations.InUse; use != nil && snap.Calibrations.Why == "" {
		snap.CalibratedFrom, snap.CalibratedTo = unit.Pascal(use.PressurePa[0]), unit.Pascal(use.PressurePa[1])
	}
	l.history.groups(&snap.Drift)
	snap.DriftPoints = l.history.charted()
	if o.Fares != nil {
		snap.Fares = o.Fares()
	}
	snap.ArriveIn, _ = s.ArriveIn()
	snap.CellsAir, snap.CoreAir = o.Core.Air(s)
	snap.Differential = s.Differential
	snap.Nodes, snap.NodesPlanned = s.Nodes()
	if c := l.curve.Load(); c != nil {
		snap.Curve = *c
	}
	snap.Spectrum, snap.Propagated = l.spectra.newest, l.propagated.Load()
	if p := l.propagation.Load(); p != nil {
		snap.Propagation = *p
	}
	l.snapshot.Store(snap)
	select {
	case l.changed <- struct{}{}:
	default:
	}
}

// A curve is drawn anew when what it stands on has moved this far.
const (
	curveTemperature = unit.Kelvin(0.2)
	curveEnergy      = 0.005 // of the energy
	curveAir         = 1e-4  // mole fraction
	curvePoints      = 160
)

// refreshCurve has the predicted curve computed beside the loop when the
// temperature or the energy that it stands on has moved.
func (l *Loop) refreshCurve() {
	in := l.state.Prediction.Input
	if l.opt.Curve == nil || !l.state.CoreKnown {
		return
	}
	was := l.curveIn
	same := math.Abs(float64(in.Temperature-was.Temperature)) < float64(curveTemperature) &&
		math.Abs(float64(in.Energy-was.Energy)) < curveEnergy*float64(in.Energy) &&
		math.Abs(float64(in.Air-was.Air)) <= curveAir
	use := l.state.Calibrations().InUse
	if same && use == l.curveOf || !l.curving.CompareAndSwap(false, true) {
		return
	}
	l.curveIn, l.curveOf = in, use
	go func() {
		defer l.curving.Store(false)
		defer l.caught("the predicted curve")
		points := make([]emission.CurvePoint, curvePoints)
		l.opt.Curve(in, use, points)
		l.curve.Store(&points)
	}()
}
