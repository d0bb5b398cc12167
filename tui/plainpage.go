package tui

import (
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/tui/frame"
)

const (
	// plainLines is how much of the record stands below the values: each new
	// line moves the others, which are then sent again.
	plainLines = 4
	// plainStep is how finely a screen without charts counts down.
	plainStep = 10 * time.Second
)

// drawPlain is the pages of charts without them, one value a line: over a slow
// line only the lines that changed are sent.
func drawPlain(a frame.Area, s *live.Snapshot) {
	y := 0
	line := func(label, value, mark string, ink frame.Ink) {
		if y >= a.H {
			return
		}
		a.Text(1, y, label, frame.Faint)
		a.Text(22, y, value, ink)
		a.Text(36, y, mark, frame.Plain)
		y++
	}
	for _, r := range []struct {
		label string
		role  reading.Role
	}{
		{"cell A", reading.CellAPressure}, {"cell B", reading.CellBPressure}, {"manifold", reading.ManifoldPressure},
		{"controller", reading.ControllerSensor}, {"supply", reading.SupplyPressure}, {"fibre", reading.FibreTemperature},
		{"pulse energy", reading.PulseEnergy}, {"inlet", reading.InletValve}, {"pump", reading.PumpValve}, {"vent", reading.VentValve},
	} {
		if fitted(s, r.role) {
			v := show(s, r.role)
			line(r.label, v.value, v.mark, v.ink)
		}
	}
	if s.CoreKnown {
		line("◇ core", pressureText(s.Core), lagText(s), frame.Predicted)
	}
	y++
	e := show(s, reading.Emission)
	line("● emission, measured", e.value, e.mark, e.ink)
	p := &s.Prediction
	switch {
	case !p.Valid || p.Emission == 0:
		line("◇ predicted", "none", p.Why, frame.Predicted)
	default:
		line("◇ predicted", emissionText(p.Emission, p.Sigma), p.Answer.String(), frame.Predicted)
	}
	if s.ResidualKnown {
		line("residual", signed(s.Residual.Nanometres(), 1)+" nm", "measured "+minus+" predicted", frame.Measured)
	}
	y++
	drawRecent(a.Sub(0, y, a.W, min(a.H-y, plainLines+1)), s)
}
