package tuitest

import (
	"math"
	"time"

	"barline/model/calibration"
	"barline/model/drift"
	"barline/model/live"
	"barline/model/trend"
	"barline/model/unit"
)

// quietOf is a quiet stretch as if it had been learnt in the first quarter of
// an hour.
func quietOf(mean, sigma float64) drift.Quiet {
	return drift.Quiet{
		From: time.Minute, To: 15 * time.Minute, Values: 84, Mean: mean, Sigma: sigma, Spacing: 10 * time.Second,
		Correlation: 5 * time.Second, Group: 30 * time.Second, GroupSigma: sigma / 1.7, MeanSigma: sigma / 9,
	}
}

// charted is a chart whose mean leaves by a line from a moment on.
func charted(s *live.Snapshot, o drift.Observable, mean, sigma, slope float64, since time.Duration, ringing bool) {
	q := quietOf(mean, sigma)
	average := mean
	points := make([]drift.Point, 0, 60)
	for at := 15 * time.Minute; at <= Elapsed; at += q.Group {
		v := mean + q.GroupSigma*wobble(len(points)*7+int(o)) + slope*math.Max(0, (at-since).Minutes())
		average += 0.1 * (v - average)
		points = append(points, drift.Point{At: at, Mean: v, Values: 3, Average: average, Alarm: ringing && at > since+2*time.Minute})
	}
	last := points[len(points)-1]
	reach := 1.1 * q.GroupSigma
	last.Lower, last.Upper = mean-reach, mean+reach
	s.DriftPoints[o] = points
	s.Drift.Tracks[o] = drift.Track{
		Charted: true, Ringing: ringing, Quiet: q, Last: last, Lower: mean - reach, Upper: mean + reach,
		Shift: last.Mean - mean, Sigma: q.GroupSigma / 1.4,
	}
}

// calibrations are two calibrations, the first of them in use.
func calibrations(s *live.Snapshot) {
	made := func(name string, after time.Duration, index, energy float64) *calibration.Calibration {
		c := &calibration.Calibration{
			Name: name, Made: start.Add(after - 24*time.Hour), Data: `9 rows of "scan"`, PressurePa: [2]float64{7e5, 11e5}, EnergyJ: [2]float64{1.3e-6, 1.3e-6},
			Points: 9, Freedom: 9, Reduced: 1.1, Before: 1.42e-9, After: 0.11e-9,
			Values: []calibration.Value{
				{Parameter: "index-scale", Unit: "1", Value: index, Sigma: 0.0021, Prior: 0.01, Told: 0.9},
				{Parameter: "energy", Unit: "1", Value: energy, Sigma: 0.031, Prior: 0.05, Told: 0.6},
				{Parameter: "gauge-zero", Unit: "Pa", Value: 410, Sigma: 900, Prior: 2000, Told: 0.8},
			},
		}
		c.Corrections[calibration.IndexScale], c.Corrections[calibration.Energy], c.Corrections[calibration.GaugeZero] = index, energy, 410
		return c
	}
	a, b := made("scan of 2026-11-30 11:00", 0, 0.0031, -0.02), made("scan of 2026-12-01 09:10", 22*time.Hour, 0.0042, -0.05)
	s.Calibrations = live.Calibrations{Known: []*calibration.Calibration{a, b}, InUse: a, Earlier: []string{""}}
	s.CalibratedFrom, s.CalibratedTo = 7*unit.Bar, 11*unit.Bar
	s.Prediction.Calibration = a.Name
}

// Drifting is a bench whose light has been moving for twenty minutes: a gauge
// whose zero went, as far as can be told.
func Drifting() *live.Snapshot {
	s := Calibrated()
	calibrations(s)
	s.Mode = live.Steady
	since := 22 * time.Minute
	s.Drift = live.DriftView{
		Watched: true, Since: at(time.Minute), Learnt: true, Standing: true, By: drift.Wavelength, Changed: at(since),
		Text:  "+1.6 nm since 11:22 UTC; 72 %: cell A gauge zero, moved by -0.130 bar; 21 %: cell A gauge span, changed by -1.4 %; cell A gauge zero and cell A gauge span cannot be told apart from here",
		Alike: map[string][]string{"cell A gauge zero": {"cell A gauge span"}},
	}
	charted(s, drift.Wavelength, -0.8e-9, 0.06e-9, 0.08e-9, since, true)
	charted(s, drift.Disagreement, 400, 60, -650, since, true)
	charted(s, drift.Strength, 0.062, 4e-4, 0, since, false)
	charted(s, drift.Width, 14.2e-9, 0.12e-9, 0, since, false)
	charted(s, drift.Warmth, 295.55, 0.01, 0, since, false)
	findings := func(p float64, c drift.Cause, a float64) drift.Finding {
		return drift.Finding{Cause: c, Probability: p, Amount: a}
	}
	causes := map[string]drift.Cause{}
	for _, c := range drift.Causes(drift.Slopes{Pressure: 9e-14, Energy: 3.6e-9}, drift.State{Pressure: 9 * unit.Bar, TwoGauges: true}) {
		causes[c.Name] = c
	}
	s.Drift.Findings = []drift.Finding{
		findings(0.72, causes["cell A gauge zero"], -13000), findings(0.21, causes["cell A gauge span"], -0.0144),
		findings(0.04, causes["pulse energy"], 0.11), findings(0.03, drift.Cause{Name: "something else"}, 0),
	}
	program := &live.Program{Name: "compare at 1 bar", Phases: []live.Phase{
		{Label: "going to 1 bar", Target: unit.Bar, Dwell: 3 * time.Minute, Row: true}, {Label: "back to 9 bar", Target: 9 * unit.Bar, Dwell: time.Minute, Row: true},
	}}
	s.Drift.Steps = []live.NextStep{
		{Worth: drift.Worth{Step: drift.Step{Name: program.Name, Cost: 6 * time.Minute}, Bits: 0.61, Certain: 0.94}, Program: program},
		{Worth: drift.Worth{Step: drift.Step{Name: "look at a lamp line with the spectrometer", Cost: 15 * time.Minute}, Bits: 0.12, Certain: 0.74}, ByHand: "feed the wavelength lamp into the spectrometer and compare with its table"},
	}
	s.Alarms = []live.Alarm{{
		Name: "the light drifts", Priority: 2, Active: true, Since: at(since + 3*time.Minute),
		Cause: s.Drift.Text, Consequence: "nothing is changed by itself", Action: "look at the drift page",
	}}
	residual := trend.NewRing()
	for i := range int(Elapsed / time.Second) {
		t := time.Duration(i) * time.Second
		residual.Add(t, (-0.8+0.08*math.Max(0, (t-since).Minutes())+0.2*wobble(i))*1e-9)
	}
	s.Residuals = residual.View()
	return s
}

// Quiet is a bench that has learnt what is quiet and has nothing to say.
func Quiet() *live.Snapshot {
	s := Calibrated()
	calibrations(s)
	s.Mode = live.Steady
	s.Drift = live.DriftView{Watched: true, Since: at(time.Minute), Learnt: true}
	charted(s, drift.Wavelength, -0.8e-9, 0.06e-9, 0, 0, false)
	charted(s, drift.Strength, 0.062, 4e-4, 0, 0, false)
	charted(s, drift.Width, 14.2e-9, 0.12e-9, 0, 0, false)
	charted(s, drift.Disagreement, 400, 60, 0, 0, false)
	return s
}

// Learning is a bench that came to rest some minutes ago.
func Learning() *live.Snapshot {
	s := Calm()
	s.Drift = live.DriftView{Watched: true, Since: at(Elapsed - 6*time.Minute), Why: ""}
	q := quietOf(-0.8e-9, 0.06e-9)
	s.Drift.Tracks[drift.Wavelength] = drift.Track{Quiet: q, Shift: 0.03e-9, Sigma: 0.02e-9}
	return s
}
