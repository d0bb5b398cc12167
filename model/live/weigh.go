package live

import (
	"fmt"
	"math"
	"strings"
	"time"

	"barline/model/drift"
	"barline/model/emission"
	"barline/model/reading"
	"barline/model/unit"
)

// unsteady is what moves by itself and is no cause, in the unit of each
// observable (from experience with simulated benches, no source).
var unsteady = [drift.ObservableCount]float64{
	drift.Wavelength: 0.02e-9, drift.Strength: 0.01, drift.Width: 0.01, drift.Disagreement: 50,
	drift.Metered: 0.005, drift.Warmth: 0.05, drift.Decay: 0.05,
}

// roughWithin is how badly the slopes of the estimate are known, as a share of
// what they make of an amount: they were found wrong by a third.
const roughWithin = 0.33

// AlikeWithin is the cosine above which two causes look the same.
const AlikeWithin = 0.98

// turn works out how the light answers to what may go on, at the bench of now.
func (c *Core) turn(s *State) {
	d := &s.drift
	p := s.Prediction
	if !p.Valid || p.Emission == 0 {
		d.sloped = false
		return
	}
	d.slopes, d.rough = c.slopesAt(s, p)
	d.sloped = true
}

// slopesAt asks the predictor, or takes differences where it does not know.
func (c *Core) slopesAt(s *State, p emission.Prediction) (drift.Slopes, bool) {
	ask := c.ask(s)
	if t, ok := ask.(Sloped); ok {
		return t.Slopes(p)
	}
	over := func(step float64, change func(*emission.Input, float64)) float64 {
		low, high := p.Input, p.Input
		change(&low, -step)
		change(&high, step)
		a, b := ask.Predict(low, nil), ask.Predict(high, nil)
		if a.Emission == 0 || b.Emission == 0 {
			return 0
		}
		return float64(b.Emission-a.Emission) / (2 * step)
	}
	return drift.Slopes{
		Pressure:    over(2e3, func(in *emission.Input, h float64) { in.Pressure += unit.Pascal(h) }),
		Temperature: over(0.5, func(in *emission.Input, h float64) { in.Temperature += unit.Kelvin(h) }),
		Energy:      over(0.01, func(in *emission.Input, h float64) { in.Energy *= unit.Joule(1 + h) }),
	}, true
}

// state is the bench that causes act on.
func (c *Core) driftState(s *State) drift.State {
	usable := func(r reading.Role) bool { return s.Reading(r, c.stale).Status.Usable() }
	return drift.State{
		Pressure:      s.Core,
		TwoGauges:     usable(reading.CellAPressure) && usable(reading.CellBPressure),
		EnergyMetered: usable(reading.PulseEnergy), TemperatureMetered: usable(reading.FibreTemperature),
	}
}

// Softened is an observation with what moves by itself counted in.
// Strength and width count only where it is known how they follow the pulse.
func Softened(o drift.Observation, known drift.Slopes, rough bool) drift.Observation {
	for k := range o.Sigma {
		if o.Sigma[k] > 0 {
			o.Sigma[k] = math.Hypot(o.Sigma[k], unsteady[k])
		}
	}
	if rough && o.Sigma[drift.Wavelength] > 0 {
		o.Sigma[drift.Wavelength] = math.Hypot(o.Sigma[drift.Wavelength], roughWithin*o.Shift[drift.Wavelength])
	}
	if known.StrengthEnergy == 0 {
		o.Sigma[drift.Strength] = 0
	}
	if known.WidthEnergy == 0 {
		o.Sigma[drift.Width] = 0
	}
	return o
}

// weigh finds what explains what stands, looks for the step that would tell,
// and writes it down.
func (c *Core) weigh(s *State, verdict drift.Verdict, fx []Effect) []Effect {
	d := &s.drift
	d.observed = d.monitor.Observation()
	by, _, _ := d.monitor.Standing()
	if by == drift.Decay && verdict == drift.NoChange && d.observed.Sigma[drift.Disagreement]+d.observed.Sigma[drift.Warmth] == 0 {
		return fx // the pressure has just reached another place: too little is seen there yet
	}
	d.weighed = s.Now.Mono
	if by == drift.Decay {
		// A pressure that falls takes the light along: only what does not
		// follow from that says anything.
		for _, o := range [...]drift.Observable{drift.Wavelength, drift.Strength, drift.Width} {
			d.observed.Sigma[o] = 0
		}
	}
	seen := Softened(d.observed, d.slopes, d.rough)
	findings, err := drift.Attribute(drift.Causes(d.slopes, c.driftState(s)), seen)
	if err != nil || !d.sloped {
		findings = nil
	}
	for _, t := range d.seen {
		if after, err := t.step.Told(findings, t.shown); err == nil {
			findings = after
		}
	}
	d.findings, d.alike = findings, nil
	if len(d.seen) == 0 { // a step that was taken may have told them apart
		d.alike = drift.Alike(findings, seen, AlikeWithin)
	}
	d.steps = c.offers(s, findings)
	d.text = c.sentence(s)
	return append(fx, Record{At: s.Now, Kind: KindDrift, Data: c.driftData(s, verdict)})
}

// sentence says what stands, since when, and what explains it.
func (c *Core) sentence(s *State) string {
	d := &s.drift
	by, since, ok := d.monitor.Standing()
	if !ok {
		return ""
	}
	o := d.observed
	lead := fmt.Sprintf("%s since %s UTC", shiftText(by, o.Shift[by]), s.utc(since).Format("15:04"))
	if d.monitor.RunsAway() {
		lead += ", never still since then"
	}
	switch {
	case by == drift.Warmth && d.sloped:
		lead += fmt.Sprintf(", which moves the emission by %+.2f nm as predicted", o.Shift[by]*d.slopes.Temperature*1e9)
	case by == drift.Metered && d.sloped:
		lead += fmt.Sprintf(", which moves the emission by %+.2f nm as predicted", o.Shift[by]*d.slopes.Energy*1e9)
	}
	parts := append([]string{lead}, drift.Explain(d.findings, d.alike)...)
	if len(d.findings) == 0 {
		parts = append(parts, "without a prediction no cause can be named")
	} else if d.rough {
		parts = append(parts, "slopes are rough until full-field runs stand")
	}
	return strings.Join(parts, "; ")
}

// shiftText writes the shift of an observable.
func shiftText(o drift.Observable, v float64) string {
	switch o {
	case drift.Wavelength:
		return fmt.Sprintf("%+.1f nm", v*1e9)
	case drift.Strength:
		return fmt.Sprintf("emission strength %+.0f %%", 100*v)
	case drift.Width:
		return fmt.Sprintf("emission width %+.0f %%", 100*v)
	case drift.Metered:
		return fmt.Sprintf("pulse energy %+.1f %%", 100*v)
	case drift.Disagreement:
		return fmt.Sprintf("cell A less cell B %+.0f mbar", v/1e2)
	case drift.Warmth:
		return fmt.Sprintf("fibre temperature %+.1f K", v)
	}
	return fmt.Sprintf("pressure with every valve shut %+.3g mbar/min", v*0.6)
}

// utc returns the wall time of a bench time.
func (s *State) utc(mono time.Duration) time.Time { return s.Now.UTC.Add(mono - s.Now.Mono) }

// driftData is a verdict with the numbers that it stood on.
func (c *Core) driftData(s *State, verdict drift.Verdict) DriftData {
	d := &s.drift
	data := DriftData{Verdict: verdict.String(), PressurePa: float64(s.Core), RunsAway: d.monitor.RunsAway(), Text: d.text}
	if verdict == drift.Learnt || verdict == drift.Returned {
		data.Text = ""
	}
	by, since, standing := d.monitor.Standing()
	if standing {
		at := s.utc(since).UTC().Truncate(time.Microsecond)
		data.By, data.Since = by.String(), &at
		if verdict == drift.NoChange {
			data.Verdict = "drift goes on"
		}
	}
	o := d.observed
	if !standing {
		o = d.monitor.Observation()
	}
	weighed := Softened(o, d.slopes, d.rough)
	for k := range drift.Observable(drift.ObservableCount) {
		if o.Sigma[k] == 0 {
			continue
		}
		x := ObservedData{Quantity: k.String(), Unit: UnitOf(k), Shift: o.Shift[k], Sigma: o.Sigma[k], Weighed: weighed.Sigma[k]}
		if t, ok := d.monitor.Track(k); ok {
			x.Charted, x.Ringing = t.Charted, t.Ringing
			x.QuietMean, x.QuietSigma, x.GroupS, x.GroupSigma = t.Quiet.Mean, t.Quiet.Sigma, t.Quiet.Group.Seconds(), t.Quiet.GroupSigma
			x.Average, x.Lower, x.Upper, x.SumHigh, x.SumLow = t.Last.Average, t.Lower, t.Upper, t.Last.High, t.Last.Low
		}
		data.Observed = append(data.Observed, x)
	}
	if standing && len(d.findings) > 0 {
		slopes, b := d.slopes, c.driftState(s)
		state := DriftState{float64(b.Pressure), b.TwoGauges, b.EnergyMetered, b.TemperatureMetered}
		data.Slopes, data.Rough, data.State, data.Alike = &slopes, d.rough, &state, d.alike
		for _, f := range d.findings {
			data.Findings = append(data.Findings, FindingOf(f))
		}
		for _, t := range d.seen {
			data.Seen = append(data.Seen, SeenData{t.step.Name, t.step.Effect, t.step.Doubt, t.step.Sigma, t.shown})
		}
		for _, n := range d.steps {
			data.Steps = append(data.Steps, n.offer())
		}
	}
	return data
}

// FindingOf is a finding as a record holds it.
func FindingOf(f drift.Finding) FindingData {
	data := FindingData{Cause: f.Cause.Name, Probability: f.Probability, Amount: f.Amount, AmountSigma: f.AmountSigma, Left: f.Left}
	if f.Cause.Text != nil {
		data.Text = f.Cause.Text(f.Amount)
	}
	return data
}

// Again finds the findings of a verdict again from the numbers that it
// stood on; without any it returns none.
func (d DriftData) Again() ([]drift.Finding, error) {
	if d.Slopes == nil || d.State == nil {
		return nil, nil
	}
	var o drift.Observation
	for _, x := range d.Observed {
		for k := range drift.Observable(drift.ObservableCount) {
			if k.String() == x.Quantity {
				o.Shift[k], o.Sigma[k] = x.Shift, x.Weighed
			}
		}
	}
	b := drift.State{Pressure: unit.Pascal(d.State.PressurePa), TwoGauges: d.State.TwoGauges, EnergyMetered: d.State.EnergyMetered, TemperatureMetered: d.State.TemperatureMetered}
	findings, err := drift.Attribute(drift.Causes(*d.Slopes, b), o)
	for _, t := range d.Seen {
		if err != nil {
			return nil, err
		}
		findings, err = drift.Step{Name: t.Step, Effect: t.Effect, Doubt: t.Doubt, Sigma: t.Sigma}.Told(findings, t.Shown)
	}
	return findings, err
}

// Drift returns what is known of the drift of the light, for screens.
func (c *Core) Drift(s *State) DriftView {
	d := &s.drift
	v := DriftView{Watched: c.driftOf.Matters[drift.Wavelength] > 0, Learnt: d.monitor.Learnt(), RunsAway: d.monitor.RunsAway(), Taken: len(d.seen)}
	stamp := func(mono time.Duration) reading.Stamp { return reading.Stamp{UTC: s.utc(mono), Mono: mono} }
	if since, why, ok := d.monitor.Known(); ok {
		v.Since, v.Why = stamp(since), why
	}
	if by, since, ok := d.monitor.Standing(); ok {
		v.Standing, v.By, v.Changed = true, by, stamp(since)
		v.Text, v.Findings, v.Alike, v.Steps = d.text, d.findings, d.alike, d.steps
	}
	for o := range v.Tracks {
		v.Tracks[o], _ = d.monitor.Track(drift.Observable(o))
	}
	v.Decay, _ = d.monitor.Decay()
	return v
}
