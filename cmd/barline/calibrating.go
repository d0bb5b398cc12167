package main

import (
	"errors"
	"fmt"
	"time"

	"barline/cmd/barline/loop"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
)

// Calibrated implements live.Calibrated.
func (g *guided) Calibrated(c *calibration.Calibration) (live.Predictor, error) {
	if g.anchored == nil {
		return nil, errors.New("full-field runs of this bench do not stand yet")
	}
	k, err := calibration.NewCorrector(c, g.anchored.Nodes())
	if err != nil {
		return nil, err
	}
	return &guided{anchored: g.anchored, estimate: g.estimate, corrector: k}, nil
}

// with returns the predictor with a calibration laid over, as far as it takes
// one; nil stands for none.
func (g *guided) with(c *calibration.Calibration) *guided {
	if c == nil {
		return g
	}
	if laid, err := g.Calibrated(c); err == nil {
		return laid.(*guided)
	}
	return g
}

// recall tells the loop which calibrations an earlier run has kept, and says
// on stderr which is in use.
func (s *session) recall(l *loop.Loop) {
	known, use, err := calibrationsOf(s.folder).load()
	found := live.CalibrationsFound{At: s.clock.Now(), Known: known, InUse: use.Name, Earlier: use.Earlier}
	if err != nil {
		found.Note = fmt.Sprintf("calibrations: %v", err)
	}
	l.Calibrations(found)
	for _, c := range known {
		if c.Name == use.Name {
			s.anchors = true // without runs there is nothing to lay it over
			fmt.Fprintf(s.stderr, "barline: calibration %q is in use: %s, made %s\n", c.Name, c.Summary(), c.Made.Format("2006-01-02 15:04 UTC"))
			return
		}
	}
	if len(known) > 0 {
		fmt.Fprintf(s.stderr, "barline: no calibration is in use; %s can be, see barline fit list %s\n", counted(len(known), "calibration"), s.folder)
	}
}

// keep does what the core asks of the store.
func (s *session) keep(k live.Keep) error {
	store := calibrationsOf(s.folder)
	if k.New != nil {
		if err := store.add(k.New); err != nil {
			return err
		}
	}
	return store.choose(chosen{Name: k.InUse, Earlier: k.Earlier})
}

// fitRows fits the rows of the last scan on the nodes of now.
func (s *session) fitRows(g *guided, rows []live.StepData, at time.Time) (*calibration.Calibration, error) {
	if g.anchored == nil {
		return nil, errors.New("full-field runs of this bench do not stand yet: try again when the prediction is anchored")
	}
	rows = lastScan(rows)
	if len(rows) == 0 {
		return nil, errors.New("no scan has been taken since the start; barline fit takes one of an earlier day")
	}
	model, err := calibration.NewModel(g.anchored.Nodes())
	if err != nil {
		return nil, err
	}
	setup := s.predictor.Setup()
	r := calibration.Request{Peaks: s.bench.Emission.Reports == "peak", Prior: priorOf(setup.Uncertainty)}
	for p := range calibration.Parameter(calibration.ParameterCount) {
		r.Free = append(r.Free, p)
	}
	for _, row := range rows {
		r.Points = append(r.Points, rowPoint(row, at))
	}
	if err := spread(r.Points); err != nil {
		return nil, err
	}
	c, err := calibration.Fit(model, r)
	if err != nil {
		return nil, err
	}
	c.Made = at.UTC().Truncate(time.Microsecond)
	c.Data = fmt.Sprintf("%d rows of %q", len(rows), rows[0].Program)
	c.Name = "scan of " + c.Made.Format("2006-01-02 15:04")
	return c, nil
}

// lastScan returns the rows of the last run of steps: of one program, their
// numbers rising.
func lastScan(rows []live.StepData) []live.StepData {
	n := len(rows)
	if n == 0 {
		return nil
	}
	first := n - 1
	for first > 0 && rows[first-1].Program == rows[n-1].Program && rows[first-1].Step < rows[first].Step {
		first--
	}
	return rows[first:]
}

// spread refuses points that cannot tell anything: fewer than two pressures.
func spread(points []calibration.Point) error {
	low, high, n := unit.Pascal(0), unit.Pascal(0), 0
	for _, p := range points {
		if !p.Status.Usable() || !(p.Value > 0) {
			continue
		}
		if n == 0 {
			low, high = p.Input.Pressure, p.Input.Pressure
		}
		low, high = min(low, p.Input.Pressure), max(high, p.Input.Pressure)
		n++
	}
	const leastSpan = 0.2 * unit.Bar
	if n < 3 || high-low < leastSpan {
		return fmt.Errorf("%d of %d points can be used, from %v to %v: expected at least three points and at least two pressures, %v or more apart: %w", n, len(points), low, high, leastSpan, calibration.ErrPoints)
	}
	return nil
}

// corrected lays the calibration over a prediction where there is one.
func (g *guided) corrected(p emission.Prediction) emission.Prediction {
	if g.corrector != nil {
		g.corrector.Correct(&p)
	}
	return p
}
