package live

import (
	"errors"
	"testing"
	"time"

	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// shifted lays a calibration over sloped as its offset.
type shifted struct {
	sloped
	ready bool
	by    *calibration.Calibration
}

func (p shifted) Predict(in emission.Input, before *emission.Prediction) emission.Prediction {
	pr := p.sloped.Predict(in, before)
	if p.by != nil {
		pr.Emission += unit.Metre(p.by.Corrections[calibration.WavelengthOffset])
		pr.Calibration, pr.Beyond = p.by.Name, !p.by.Covers(in)
	}
	return pr
}

func (p shifted) Calibrated(c *calibration.Calibration) (Predictor, error) {
	if !p.ready {
		return nil, errors.New("no runs yet")
	}
	p.by = c
	return p, nil
}

func named(name string, offset float64) *calibration.Calibration {
	c := &calibration.Calibration{Name: name, PressurePa: [2]float64{8e5, 10e5}, EnergyJ: [2]float64{1.3e-6, 1.3e-6}}
	c.Corrections[calibration.WavelengthOffset] = offset
	return c
}

func TestCalibrationIsAdoptedFoundAgainAndReverted(t *testing.T) {
	w := newWatched(t, 11)
	w.take(CalibrationsFound{At: w.stamp(), Known: []*calibration.Calibration{named("first", 1e-9), named("second", 2e-9)}, InUse: "first"})
	w.live(5*time.Second, nil)
	if p := w.state.Prediction; p.Calibration != "" || w.state.Calibrations().Why == "" || w.state.Calibrations().InUse.Name != "first" {
		t.Errorf("before there are runs: %q, why %q", p.Calibration, w.state.Calibrations().Why)
	}
	w.take(ModelChanged{At: w.stamp(), Predictor: shifted{ready: true}, Answer: "anchored", Nodes: 9})
	w.live(5*time.Second, nil)
	if p := w.state.Prediction; p.Calibration != "first" || w.state.Calibrations().Why != "" {
		t.Errorf("with runs: %q, why %q", p.Calibration, w.state.Calibrations().Why)
	}
	w.take(Asked{At: w.stamp(), Intent: Adopt{"second"}})
	w.live(time.Second, nil)
	if p := w.state.Prediction; p.Calibration != "second" {
		t.Errorf("adopted: %q", p.Calibration)
	}
	for _, refused := range []Intent{Adopt{"second"}, Adopt{"third"}} {
		w.take(Asked{At: w.stamp(), Intent: refused})
		if w.state.Notice == "" || w.state.Calibrations().InUse.Name != "second" {
			t.Errorf("%+v: %q", refused, w.state.Notice)
		}
	}
	w.take(Asked{At: w.stamp(), Intent: Revert{}})
	w.live(time.Second, nil)
	if p := w.state.Prediction; p.Calibration != "first" {
		t.Errorf("reverted: %q", p.Calibration)
	}
	w.take(Asked{At: w.stamp(), Intent: Revert{}})
	w.live(time.Second, nil)
	if p := w.state.Prediction; p.Calibration != "" {
		t.Errorf("reverted to the bench file: %q", p.Calibration)
	}
	w.take(Asked{At: w.stamp(), Intent: Revert{}})
	if w.state.Notice == "" || w.state.Notice[:7] != "refused" {
		t.Errorf("nothing to go back to: %q", w.state.Notice)
	}
	var actions []string
	for _, r := range w.records {
		if d, ok := r.Data.(CalibrationData); ok {
			actions = append(actions, d.Action)
		}
	}
	if want := []string{"in use", "adopted", "reverted", "reverted"}; len(actions) != len(want) || actions[1] != want[1] || actions[3] != want[3] {
		t.Errorf("recorded %v, want %v", actions, want)
	}
}

// A prediction that moves is no drift of the light.
func TestAdoptingIsNoDrift(t *testing.T) {
	w := newWatched(t, 12)
	w.take(ModelChanged{At: w.stamp(), Predictor: shifted{ready: true}, Answer: "anchored", Nodes: 9})
	w.take(CalibrationsFound{At: w.stamp(), Known: []*calibration.Calibration{named("first", 1.5e-9)}})
	w.live(15*time.Minute, nil)
	w.take(Asked{At: w.stamp(), Intent: Adopt{"first"}})
	w.live(15*time.Minute, nil)
	if v := w.core.Drift(&w.state); v.Standing || !v.Learnt || len(w.rings) > 0 {
		t.Errorf("after adopting %+v, rings %v", v.Text, w.rings)
	}
	if s := w.state; s.Residual < -3e-9 || s.Prediction.Calibration != "first" {
		t.Errorf("residual %v", s.Residual)
	}
}

func TestBeyondTheDataIsMarkedInTheRecord(t *testing.T) {
	w := newWatched(t, 13)
	w.take(ModelChanged{At: w.stamp(), Predictor: shifted{ready: true}, Answer: "anchored", Nodes: 9})
	w.take(CalibrationsFound{At: w.stamp(), Known: []*calibration.Calibration{named("first", 1e-9)}, InUse: "first"})
	w.live(5*time.Second, nil)
	w.off[reading.CellAPressure], w.off[reading.CellBPressure] = 2e5, 2e5
	w.live(2*time.Minute, nil)
	marked := false
	for _, r := range w.records {
		if d, ok := r.Data.(PredictionData); ok && d.Beyond && d.Calibration == "first" {
			marked = true
		}
	}
	if !marked {
		t.Error("a prediction at 11 bar from data up to 10 bar is not marked")
	}
}

func TestFittingIsAskedForOnceAndAnswered(t *testing.T) {
	w := newWatched(t, 14)
	ask := func() (fits int) {
		for _, f := range w.core.Step(&w.state, Asked{At: w.stamp(), Intent: Calibrate{}}, nil) {
			if _, ok := f.(Fit); ok {
				fits++
			}
		}
		return fits
	}
	if ask() != 1 || ask() != 0 {
		t.Error("one fit at a time")
	}
	w.take(Fitted{At: w.stamp(), Err: "too few points"})
	if w.state.Calibrations().Fitting || w.state.Notice != "no calibration: too few points" {
		t.Errorf("%q", w.state.Notice)
	}
	ask()
	var kept *Keep
	for _, f := range w.core.Step(&w.state, Fitted{At: w.stamp(), Calibration: named("new", 0)}, nil) {
		if k, ok := f.(Keep); ok {
			kept = &k
		}
	}
	if kept == nil || kept.New.Name != "new" || kept.InUse != "" || len(w.state.Calibrations().Known) != 1 {
		t.Errorf("kept %+v", kept)
	}
}
