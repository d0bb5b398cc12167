// Package tuitest makes snapshots of bench situations for tests of screens
// and for pictures: what the bench looks like calm, filling, in alarm and so
// on. The numbers are plausible and nothing more: no physics is in them.
package tuitest

import (
	"fmt"
	"math"
	"time"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
)

// Start is when every situation's record began.
var start = time.Date(2026, 12, 1, 11, 0, 0, 0, time.UTC)

// Elapsed is how long every situation's record has been running.
const Elapsed = 42*time.Minute + 5*time.Second + 120*time.Millisecond

func at(mono time.Duration) reading.Stamp { return reading.Stamp{UTC: start.Add(mono), Mono: mono} }

// Heron returns the demo bench as its sample file describes it.
func Heron() *bench.Bench {
	return &bench.Bench{
		Bench: bench.Identity{Name: "Heron"},
		Fibre: bench.Fibre{
			Kind: "antiresonant", CoreDiameter: 34 * unit.Micrometre, Wall: 180 * unit.Nanometre,
			Length: 30 * unit.Centimetre, Loss: 1,
		},
		Gas: bench.Gas{Species: "argon", Density: "virial", Index: "peck-fisher-1964", N2: "lehmeier-1985"},
		Pulse: bench.Pulse{
			Wavelength: 1030 * unit.Nanometre, Duration: 35 * unit.Femtosecond, Shape: "sech2",
			Energy: 1.3 * unit.Microjoule, RepetitionRate: 100e3,
		},
		Panel: bench.Panel{CellVolume: 60e-6, Supply: 18 * unit.Bar, Ambient: 1.013 * unit.Bar},
		Limits: bench.Limits{
			FibreSeal: 16 * unit.Bar, Cells: 16 * unit.Bar, Windows: 16 * unit.Bar, Line: 20 * unit.Bar,
			RiseRate: 0.2e5, FallRate: 0.2e5, PumpBelow: 1.2 * unit.Bar, Stale: 2, Confirm: 3,
			Disagreement: 0.15 * unit.Bar, Arming: 120, Follow: 2 * unit.Bar,
		},
		Instrument: []bench.Instrument{
			{Name: "gauges", Channel: []bench.Channel{
				{Name: "cell A", Role: reading.CellAPressure}, {Name: "cell B", Role: reading.CellBPressure}, {Name: "fibre", Role: reading.FibreTemperature},
			}},
			{Name: "controller", Channel: []bench.Channel{
				{Name: "setpoint", Role: reading.Setpoint, Write: "SOUR:PRES:LEV {value}"}, {Name: "controller", Role: reading.ControllerSensor},
			}},
			{Name: "spectrometer", Channel: []bench.Channel{
				{Name: "emission", Role: reading.Emission, Range: []string{"190 nm", "400 nm"}}, {Name: "width", Role: reading.EmissionWidth}, {Name: "strength", Role: reading.EmissionStrength},
			}},
		},
		Emission: bench.Emission{Answer: "estimate", Reports: "centroid", Wavelengths: "vacuum"},
		Screen:   bench.Screen{Background: "dark", TimeZone: "UTC"},
	}
}

// predicted is a smooth stand-in for a curve of emission over pressure, in nm
// over bar.
func predicted(bar float64) float64 { return 262 + 9.4*(bar-9) - 0.35*(bar-9)*(bar-9) }

// wobble is a repeatable stand-in for noise, within ±1.
func wobble(i int) float64 {
	return 0.6*math.Sin(float64(i)*2.399) + 0.4*math.Sin(float64(i)*0.731+1)
}

func set(s *live.Snapshot, role reading.Role, channel string, v float64, age time.Duration) {
	s.Latest[role] = reading.Reading{Channel: channel, Role: role, Value: v, Taken: at(Elapsed - age), Status: reading.Good}
}

// Calm is a bench that stands at 9 bar and emits where it should.
func Calm() *live.Snapshot {
	s := &live.Snapshot{
		Now: at(Elapsed), Bench: Heron(), Simulated: true,
		Mode: live.Watching, Setpoint: 9 * unit.Bar, Core: 9.001 * unit.Bar, CoreKnown: true,
		Residual: -0.8 * unit.Nanometre, ResidualKnown: true,
		Record: live.RecordHealth{Writing: true, Written: 1042, Waiting: 3},
		Folder: "heron-2026-12-01",
		Recent: []live.Line{
			{At: at(Elapsed - 182*time.Second), Kind: live.KindIntent, Text: "go to 9.000 bar"},
			{At: at(Elapsed - 181*time.Second), Kind: live.KindCommand, Text: "setpoint 9.000 bar"},
			{At: at(Elapsed - 63*time.Second), Kind: live.KindAlarm, Text: "lag of the core: returned"},
			{At: at(Elapsed - 34*time.Second), Kind: live.KindNote, Text: "purge valve checked"},
			{At: at(Elapsed - 4*time.Second), Kind: live.KindStep, Text: "step 10, 9.000 bar: 261.2 nm"},
		},
	}
	for _, l := range []string{"gauges", "controller", "spectrometer"} {
		s.Links = append(s.Links, live.LinkHealth{Instrument: l, Up: true, Since: at(time.Second)})
	}
	set(s, reading.CellAPressure, "cell A", 9.003e5, 80*time.Millisecond)
	set(s, reading.CellBPressure, "cell B", 8.999e5, 90*time.Millisecond)
	set(s, reading.FibreTemperature, "fibre", 295.55, 100*time.Millisecond)
	set(s, reading.Setpoint, "setpoint", 9e5, 200*time.Millisecond)
	set(s, reading.ControllerSensor, "controller", 9.006e5, 210*time.Millisecond)
	set(s, reading.Emission, "emission", 261.2e-9, 60*time.Millisecond)
	set(s, reading.EmissionWidth, "width", 14.2e-9, 60*time.Millisecond)
	set(s, reading.EmissionStrength, "strength", 0.062, 60*time.Millisecond)
	s.Profile = profile(9.003, 9.001, 8.999)
	s.Prediction = Prediction(9.001)
	s.Curve = Curve()
	s.Resonances = []live.Span{{From: 376 * unit.Nanometre, To: 400 * unit.Nanometre}, {From: 204 * unit.Nanometre, To: 217 * unit.Nanometre}}
	s.Spectrum = measured(261.2, 14.2, 60*time.Millisecond)
	s.Propagated, s.Propagation = propagated(9.001), live.Propagation{On: true}
	for i := range 13 {
		up := 7 + 0.4*float64(i)
		if up <= 9.01 {
			s.Points = append(s.Points, live.Point{
				At: at(time.Duration(i) * time.Minute), Pressure: unit.Pascal(up * 1e5),
				Emission: unit.Metre((predicted(up) - 0.9 + 0.5*wobble(i)) * 1e-9), Rising: true,
			})
		}
	}
	a, e, r := trend.NewRing(), trend.NewRing(), trend.NewRing()
	for i := 0; ; i++ {
		t := time.Duration(i) * 100 * time.Millisecond
		if t > Elapsed {
			break
		}
		set := 9.0
		if back := (Elapsed - t).Seconds(); back > 70 { // the step that came before
			set = 9 - min(0.4, 0.2*(back-70))
		}
		lag := 0.02 * wobble(i/40)
		a.Add(t, (set+lag*0.2+0.0015*wobble(i))*1e5)
		e.Add(t, set*1e5)
		if i%2 == 0 {
			r.Add(t, (-0.8+0.25*wobble(i/60)+0.3*wobble(i))*1e-9)
		}
	}
	s.PressureA, s.Expected, s.Residuals = a.View(), e.View(), r.View()
	s.Marks = []live.Mark{
		{At: Elapsed - 71*time.Second, Kind: live.KindIntent}, {At: Elapsed - 70*time.Second, Kind: live.KindStep},
		{At: Elapsed - 34*time.Second, Kind: live.KindNote},
	}
	s.Trends[reading.CellAPressure] = s.PressureA
	for role, f := range map[reading.Role]func(i int) float64{
		reading.FibreTemperature: func(i int) float64 { return 295.5 + 0.3*float64(i)/2525 + 0.01*wobble(i) },
		reading.EmissionWidth:    func(i int) float64 { return (14.2 + 0.2*wobble(i)) * 1e-9 },
		reading.EmissionStrength: func(i int) float64 { return 0.062 + 0.001*wobble(i) },
	} {
		ring := trend.NewRing()
		for i := range int(Elapsed / time.Second) {
			ring.Add(time.Duration(i)*time.Second, f(i))
		}
		s.Trends[role] = ring.View()
	}
	return s
}

// profile sags smoothly from the cells' pressures to the middle's, in bar.
func profile(a, middle, b float64) []unit.Pascal {
	p := make([]unit.Pascal, 32)
	for i := range p {
		x := float64(i) / float64(len(p)-1)
		ends := a + (b-a)*x
		sag := (a+b)/2 - middle
		p[i] = unit.Pascal((ends - sag*4*x*(1-x)) * 1e5)
	}
	return p
}

// rows are what a scan of eleven steps up and some down has written.
func rows() []live.StepData {
	var all []live.StepData
	for i := range 17 {
		bar := 7 + 0.4*float64(i)
		if i > 10 {
			bar = 11 - 0.4*float64(i-10)
		}
		r := live.StepData{
			Program: "scan", Step: i + 1, Label: "step", SetPa: bar * 1e5, MeasuredPa: (bar + 0.002) * 1e5, CorePa: (bar + 0.001) * 1e5,
			TemperatureK: 295.55, EnergyJ: 1.3e-6, SigmaM: 10e-9, ScatterM: 0.3e-9, Samples: 40, Status: "good",
		}
		if i == 8 {
			r.Status, r.Samples = "function check", 0
			all = append(all, r)
			continue
		}
		p := predicted(bar) * 1e-9
		d := (-0.9 + 0.15*float64(i%11)*0.3 + 0.3*wobble(i)) * 1e-9
		m := p + d
		r.PredictedM, r.MeasuredM, r.ResidualM = &p, &m, &d
		all = append(all, r)
	}
	return all
}

// Prediction returns what the model is taken to say at a pressure in bar.
func Prediction(bar float64) emission.Prediction {
	p := emission.Prediction{
		Input:  emission.Input{Pressure: unit.Pascal(bar * 1e5), Temperature: 295.55, Energy: 1.3 * unit.Microjoule},
		Answer: emission.Estimate, Valid: true,
		ZeroDispersionCount: 1, SolitonOrder: 4.02, FissionLength: 10.4 * unit.Centimetre,
		Emission: unit.Metre(predicted(bar) * 1e-9), Sigma: 10 * unit.Nanometre,
	}
	p.ZeroDispersion[0] = 622.7 * unit.Nanometre
	p.Verdicts[0] = emission.Verdict{Name: "soliton order", Value: 4.02, Bound: 15, OK: true, Consequence: "incoherent"}
	p.Verdicts[1] = emission.Verdict{Name: "fission length", Value: 10.4, Bound: 30, Unit: "cm", OK: true, Consequence: "the pulse leaves before it splits"}
	p.VerdictCount = 2
	return p
}

// Curve returns the prediction over the working range.
func Curve() []emission.CurvePoint {
	var c []emission.CurvePoint
	for bar := 6.0; bar <= 12.5; bar += 0.25 {
		p := emission.CurvePoint{Pressure: unit.Pascal(bar * 1e5)}
		if bar >= 6.5 {
			p.Emission, p.Sigma = unit.Metre(predicted(bar)*1e-9), 10*unit.Nanometre
		}
		c = append(c, p)
	}
	return c
}

// Filling is a ramp under way from 9 to 11 bar, with a scan's points behind it.
func Filling() *live.Snapshot {
	s := Calm()
	s.Mode, s.Why, s.ArmedUntil = live.Ramping, "ramping", Elapsed+104*time.Second
	s.Target, s.Setpoint, s.Core = 11*unit.Bar, 9.8*unit.Bar, 9.58*unit.Bar
	set(s, reading.CellAPressure, "cell A", 9.71e5, 80*time.Millisecond)
	set(s, reading.CellBPressure, "cell B", 9.69e5, 90*time.Millisecond)
	set(s, reading.ControllerSensor, "controller", 9.74e5, 210*time.Millisecond)
	set(s, reading.Setpoint, "setpoint", 9.8e5, 200*time.Millisecond)
	set(s, reading.Emission, "emission", 266.9e-9, 60*time.Millisecond)
	s.Lag, s.SettleIn = 0.13*unit.Bar, 38*time.Second
	s.Profile = profile(9.71, 9.58, 9.69)
	s.Prediction = Prediction(9.58)
	s.Spectrum = measured(266.9, 17.5, 60*time.Millisecond)
	s.Propagated = propagated(9.52)
	s.Propagated.Asked = at(Elapsed - 1400*time.Millisecond)
	s.Propagation = live.Propagation{On: true, Busy: true, For: s.Prediction.Input, Share: 0.35}
	s.Residual = 0.1 * unit.Nanometre
	a, e := trend.NewRing(), trend.NewRing()
	for i := range int(Elapsed / (100 * time.Millisecond)) {
		t := time.Duration(i) * 100 * time.Millisecond
		set := 9 + 0.2*max(0, 4-(Elapsed-t).Seconds())
		a.Add(t, (9+0.2*max(0, 3.55-(Elapsed-t).Seconds())+0.0015*wobble(i))*1e5)
		e.Add(t, set*1e5)
	}
	s.PressureA, s.Expected = a.View(), e.View()
	s.Program = live.Progress{Name: "scan", Label: "step to 11.000 bar", Index: 10, Count: 21, Left: 4*time.Minute + 40*time.Second}
	s.Rows = rows()
	s.Points = nil
	for i := range 22 {
		bar, rising := 7+0.4*float64(i), true
		if i > 10 {
			bar, rising = 11-0.4*float64(i-11), false
		}
		s.Points = append(s.Points, live.Point{
			At: at(time.Duration(i) * time.Minute), Pressure: unit.Pascal(bar * 1e5),
			Emission: unit.Metre((predicted(bar) - 0.9 + 0.5*wobble(i)) * 1e-9), Rising: rising,
		})
	}
	return s
}

// Stale is a bench whose gauge of cell B fell silent while it settled.
func Stale() *live.Snapshot {
	s := Calm()
	s.Latest[reading.CellBPressure].Taken = at(Elapsed - 12400*time.Millisecond)
	s.Latest[reading.CellBPressure].Status = reading.Failure
	s.Latest[reading.CellBPressure].Reason = "no reading for 12 s"
	s.Mode, s.Why = live.Held, "cell B is silent"
	s.Marks = append(s.Marks, live.Mark{At: Elapsed - 10400*time.Millisecond, Kind: live.KindAlarm})
	s.Alarms = []live.Alarm{{
		Name: "cell B silent", Priority: 1, Active: true, Since: at(Elapsed - 10400*time.Millisecond),
		Cause: "no reading from cell B for 12 s", Consequence: "setpoint frozen at 9.000 bar", Action: "check the cable of the gauges",
	}}
	return s
}

// LostLink is a bench whose spectrometer was unplugged.
func LostLink() *live.Snapshot {
	s := Calm()
	s.Links[2].Up, s.Links[2].Since, s.Links[2].Reason = false, at(Elapsed-95*time.Second), "cable pulled"
	for _, r := range []reading.Role{reading.Emission, reading.EmissionWidth, reading.EmissionStrength} {
		s.Latest[r].Taken = at(Elapsed - 95*time.Second)
		s.Latest[r].Status = reading.Failure
	}
	s.ResidualKnown = false
	s.Spectrum = measured(261.2, 14.2, 95*time.Second)
	s.Alarms = []live.Alarm{{
		Name: "spectrometer lost", Priority: 2, Active: true, Acked: true, Since: at(Elapsed - 95*time.Second),
		Cause: "the line to the spectrometer is gone: cable pulled", Consequence: "no residual, drift is not watched", Action: "plug it in, it is opened again by itself",
	}}
	r := trend.NewRing()
	for i := range int((Elapsed - 95*time.Second) / (200 * time.Millisecond)) {
		r.Add(time.Duration(i)*200*time.Millisecond, (-0.8+0.25*wobble(i/30)+0.3*wobble(i))*1e-9)
	}
	s.Residuals = r.View()
	return s
}

// FullDisk is a bench whose records wait in memory.
func FullDisk() *live.Snapshot {
	s := Calm()
	s.Mode, s.Why = live.Held, "nothing is being recorded: no space left on device"
	s.Record = live.RecordHealth{Reason: "no space left on device", Written: 1042, Waiting: 388, Lost: 0}
	s.Alarms = []live.Alarm{{
		Name: "logbook not written", Priority: 1, Active: true, Since: at(Elapsed - 31*time.Second),
		Cause: "no space left on device", Consequence: "only HOLD is taken", Action: "free space in the logbook's folder",
	}}
	return s
}

// NoEmission is a bench at a pressure where the model sees none, and nor does
// the spectrometer.
func NoEmission() *live.Snapshot {
	s := Calm()
	s.Core, s.Setpoint = 6.2*unit.Bar, 6.2*unit.Bar
	set(s, reading.CellAPressure, "cell A", 6.203e5, 80*time.Millisecond)
	set(s, reading.CellBPressure, "cell B", 6.199e5, 90*time.Millisecond)
	s.Latest[reading.Emission].Status = reading.FunctionCheck
	s.Latest[reading.Emission].Reason = "no lobe above the threshold"
	s.Prediction = Prediction(6.2)
	s.Prediction.Emission, s.Prediction.Sigma = 0, 0
	s.Prediction.Why = "inside the margin of the resonance at 210 nm"
	s.Spectrum = measured(261.2, 14.2, 60*time.Millisecond)
	for i := range s.Spectrum.Counts {
		s.Spectrum.Counts[i] = s.Spectrum.Dark + 4*wobble(i)
	}
	s.Spectrum.Status, s.Spectrum.Reason = reading.FunctionCheck, "no light above the threshold"
	s.Propagated = propagated(6.2)
	s.Propagated.Emission, s.Propagated.Peak, s.Propagated.Width, s.Propagated.Conversion = 0, 0, 0, 0
	for i, w := range s.Propagated.Wavelength {
		if w < 400*unit.Nanometre {
			s.Propagated.Spectrum[i] = 1e-7
		}
	}
	s.Propagated.Reliable, s.Propagated.Ultraviolet = false, 0
	s.Propagated.Reasons = []string{"the pump at 1030 nm is in normal dispersion (12 fs2/m): the pulse spreads instead of compressing"}
	s.ResidualKnown = false
	return s
}

// Fresh is a bench in its first moments: nothing has spoken yet.
func Fresh() *live.Snapshot {
	s := &live.Snapshot{
		Now: at(200 * time.Millisecond), Bench: Heron(), Simulated: true,
		Record: live.RecordHealth{Writing: true, Written: 2}, Folder: "heron-2026-12-01",
		Propagation: live.Propagation{On: true},
	}
	for _, l := range []string{"gauges", "controller", "spectrometer"} {
		s.Links = append(s.Links, live.LinkHealth{Instrument: l, Reason: "not opened yet"})
	}
	return s
}

// Panel is a bench on which every valve reports, with gauges on manifold and
// supply and a meter of pulse energy, while it fills from low pressure.
func Panel() *live.Snapshot {
	s := Filling()
	set(s, reading.SupplyPressure, "supply", 18.04e5, 300*time.Millisecond)
	set(s, reading.ManifoldPressure, "manifold", 9.81e5, 100*time.Millisecond)
	set(s, reading.InletValve, "inlet", 0.37, 100*time.Millisecond)
	set(s, reading.PumpValve, "pump", 0, 100*time.Millisecond)
	set(s, reading.VentValve, "vent", 0, 100*time.Millisecond)
	set(s, reading.PulseEnergy, "energy", 1.304e-6, 100*time.Millisecond)
	set(s, reading.Ambient, "barometer", 1.0132e5, 900*time.Millisecond)
	s.Latest[reading.VentValve].Status = reading.Failure
	s.Latest[reading.CellBPressure].Status = reading.MaintenanceRequired
	return s
}

// Branches is a bench whose prediction has a gap where its walls resonate, and
// is extrapolated, with broken limits and notes beside it.
func Branches() *live.Snapshot {
	s := Calm()
	for i := range s.Curve {
		if bar := s.Curve[i].Pressure.Bar(); bar > 9.6 && bar < 10.4 {
			s.Curve[i].Emission, s.Curve[i].Sigma = 0, 0
		}
	}
	for i := range s.Curve {
		if c := &s.Curve[i]; c.Emission > 0 && c.Pressure.Bar() < 10.4 {
			c.Others[0] = c.Emission - 21*unit.Nanometre
		}
	}
	s.Prediction.Extrapolated = true
	s.Prediction.Answer = emission.Anchored
	s.Prediction.Sigma = 0.6 * unit.Nanometre
	s.Prediction.BranchCount = 2
	s.Prediction.Branches[0] = emission.Branch{Emission: s.Prediction.Emission, Conversion: 0.051}
	s.Propagated.Others = []emission.Branch{{Emission: 241 * unit.Nanometre, Conversion: 0.038}}
	s.Prediction.Branches[1] = emission.Branch{Emission: 241 * unit.Nanometre, Conversion: 0.038}
	s.Prediction.Verdicts[0].Value, s.Prediction.Verdicts[0].OK = 16.2, false
	s.Prediction.Verdicts[1].Value, s.Prediction.Verdicts[1].OK = 31.4, false
	return s
}

// Alarms is a bench with more alarms than fit a banner.
func Alarms() *live.Snapshot {
	s := FullDisk()
	for i := range 8 {
		s.Alarms = append(s.Alarms, live.Alarm{
			Name: fmt.Sprintf("channel %d out of range", i+1), Priority: 3, Active: i%2 == 0, Acked: i%3 == 0,
			Since: at(Elapsed - time.Duration(i)*time.Minute),
			Cause: "value above the specified range", Consequence: "kept out of fits", Action: "check the range in the bench file",
		})
	}
	return s
}

// Scanning is a scan that waits at a step, its rows behind it.
func Scanning() *live.Snapshot {
	s := Filling()
	s.Mode, s.Why = live.Settling, "averaging"
	s.Target, s.Setpoint, s.Core = 9.8*unit.Bar, 9.8*unit.Bar, 9.801*unit.Bar
	s.Lag, s.SettleIn = 0, 0
	s.Program.Dwelling, s.Program.DwellLeft = true, 12*time.Second
	return s
}

// Alarm is a bench on which two gauges disagree: the ramp stopped, and nobody
// has seen it.
func Alarm() *live.Snapshot {
	s := Filling()
	s.Mode, s.Why = live.Held, "cell A and cell B disagree by 212 mbar"
	set(s, reading.CellBPressure, "cell B", 9.498e5, 90*time.Millisecond)
	s.Alarms = []live.Alarm{{
		Name: "gauges disagree", Priority: 1, Active: true, Since: at(Elapsed - 4*time.Second),
		Cause: "cell A and cell B disagree by 212 mbar", Consequence: "the ramp is held", Action: "see which gauge is wrong before going on",
	}}
	s.Marks = append(s.Marks, live.Mark{At: Elapsed - 4*time.Second, Kind: live.KindAlarm})
	return s
}

// Calibrated is a bench whose prediction stands on a calibration. Calm has
// none.
func Calibrated() *live.Snapshot {
	s := Calm()
	s.CalibratedFrom, s.CalibratedTo = 7*unit.Bar, 11*unit.Bar
	s.Prediction.Answer, s.Prediction.Sigma = emission.Anchored, 0.8*unit.Nanometre
	for i := range s.Curve {
		if s.Curve[i].Emission > 0 {
			s.Curve[i].Sigma = 0.8 * unit.Nanometre
		}
	}
	return s
}

// Replay is the filling played back from its record, at a stop.
func Replay() *live.Snapshot {
	s := Filling()
	s.ReadOnly, s.Replay = true, "10 × life, paused"
	s.ArmedUntil = 0
	s.Record = live.RecordHealth{Writing: true}
	return s
}

// Situations are all of them by name.
func Situations() map[string]func() *live.Snapshot {
	return map[string]func() *live.Snapshot{
		"calm": Calm, "filling": Filling, "stale": Stale, "lost-link": LostLink, "full-disk": FullDisk,
		"no-emission": NoEmission, "panel": Panel, "branches": Branches, "fresh": Fresh, "alarms": Alarms,
		"replay": Replay, "scanning": Scanning, "alarm": Alarm, "calibrated": Calibrated,
		"drifting": Drifting, "quiet": Quiet, "learning": Learning,
	}
}
