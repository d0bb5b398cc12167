package tui

import (
	"strings"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/chart"
	"barline/tui/frame"
)

// drawPath draws the light's way through the cells and the fibre, and beneath
// it the gas line that joins them:
//
//	1.30 µJ ─▶┤cell A  9.003 bar├══════ core 9.001 bar ══════┤cell B  8.999 bar├─▶ 261.2 nm
//	          │ ● good              30 cm, 22.4 °C           │ ● good
//	 supply ──┴────── inlet ──── controller 9.006 bar ───────┴── vent ── pump
//
// Where there are more than three rows, the pressure along the core stands
// between the cells.
func drawPath(a frame.Area, s *live.Snapshot) {
	w := a.W
	energy := show(s, reading.PulseEnergy)
	in := energy.value
	inInk := energy.ink
	if !fitted(s, reading.PulseEnergy) {
		in, inInk = "light", frame.Faint
		if s.Bench != nil && s.Bench.Pulse.Energy > 0 {
			in = fixed(s.Bench.Pulse.Energy.Microjoules(), 2) + " µJ"
		}
	}
	out := show(s, reading.Emission)

	left := 11 // columns before cell A
	right := w - 12
	cell := 19 // from bracket to bracket: "cell A 10.422 bar"
	ax, bx := left, right-cell

	// The light.
	a.Text(1, 0, in, inInk)
	a.Text(left-2, 0, "─▶", frame.Gas)
	a.Text(right, 0, "─▶", frame.Gas)
	a.Text(right+3, 0, out.value, out.ink)

	drawCell(a.Sub(ax, 0, cell, 2), "A", show(s, reading.CellAPressure))
	drawCell(a.Sub(bx, 0, cell, 2), "B", show(s, reading.CellBPressure))
	a.Sub(right+3, 1, w-right-3, 1).Text(0, 0, out.brief(), statusInk(out))

	// The fibre between them.
	fibre := a.Sub(ax+cell, 0, bx-ax-cell, 2)
	for x := range fibre.W {
		fibre.Set(x, 0, '═', frame.Gas)
	}
	core := "core –"
	coreInk := frame.Faint
	if s.CoreKnown {
		core, coreInk = "◇ core "+pressureText(s.Core), frame.Predicted
	}
	fibre.Centre(0, 0, fibre.W, " "+core+" ", coreInk)
	note := "fibre"
	ink := frame.Faint
	if t := show(s, reading.FibreTemperature); fitted(s, reading.FibreTemperature) {
		note = "fibre " + t.value
		if t.mark != "● good" {
			note = strings.TrimSpace("fibre " + t.mark)
			ink = t.ink
		}
	}
	if behind := lagText(s); behind != "" && fibre.W >= fibre.Width(note+" · "+behind) {
		note += " · " + behind
		ink = frame.Predicted
	}
	if air := airText(s); air != "" && fibre.W >= fibre.Width(note+" · "+air) {
		note += " · " + air
	}
	fibre.Centre(0, 1, fibre.W, note, ink)

	for y := 2; y < a.H-1; y++ {
		a.Set(ax, y, '│', frame.Gas)
		a.Set(bx, y, '│', frame.Gas)
	}
	if a.H > 3 {
		drawProfile(a.Sub(ax+cell, 2, bx-ax-cell, a.H-3), s)
	}
	drawLine(a.Sub(0, a.H-1, w, 1), s, ax, bx)
}

// noticeableAir is the residual air in the core that is worth a word: 10 ppm
// are in ordinary pure gas.
const noticeableAir = 20e-6

// airText says how much air is left in the core.
func airText(s *live.Snapshot) string {
	if !s.CoreKnown || !(s.CoreAir >= noticeableAir) {
		return ""
	}
	return "air " + live.AirText(s.CoreAir)
}

// noticeableLag is the lag of the core that is worth a word.
const noticeableLag = 5 * unit.Millibar

// lagText says how far the gas in the core is behind the cells.
func lagText(s *live.Snapshot) string {
	lag := max(s.Lag, -s.Lag)
	if !s.CoreKnown || !(lag >= noticeableLag) {
		return ""
	}
	side := "below"
	if s.Lag < 0 {
		side = "above"
	}
	text := "core " + fixed(float64(lag)/1e2, 0) + " mbar " + side
	if s.SettleIn > 0 {
		text += ", even in " + spanText(s.SettleIn)
	}
	return text
}

// drawProfile draws the pressure along the core, as the model has it, under
// the fibre that it belongs to.
func drawProfile(a frame.Area, s *live.Snapshot) {
	if len(s.Profile) < 2 {
		return
	}
	var y chart.Range
	points := make([]chart.Point, len(s.Profile))
	for i, p := range s.Profile {
		y.Include(p.Bar())
		points[i] = chart.Point{X: float64(i), Y: p.Bar()}
	}
	y = y.Padded(0.02, 0.02) // 20 mbar: an even core is a straight line
	p := chart.New(a, chart.Axes{X: chart.Between(0, float64(len(points)-1)), Y: y, Bare: true})
	p.Curve(points, frame.Predicted)
	p.Done()
}

func statusInk(r shown) frame.Ink {
	if r.ink == frame.Measured {
		return frame.Good
	}
	return r.ink
}

func drawCell(a frame.Area, name string, r shown) {
	a.Set(0, 0, '┤', frame.Gas)
	a.Set(a.W-1, 0, '├', frame.Gas)
	a.Text(1, 0, "cell "+name, frame.Strong)
	a.Right(a.W-1, 0, r.value, r.ink)
	a.Set(0, 1, '│', frame.Gas)
	a.Text(2, 1, r.mark, statusInk(r))
}

// part is one piece of the gas line, from the supply on.
type part struct {
	text string
	ink  frame.Ink
}

// drawLine draws the gas line below the cells, from the supply to the pump.
func drawLine(a frame.Area, s *live.Snapshot, ax, bx int) {
	supply := part{"supply", frame.Faint}
	if r := show(s, reading.SupplyPressure); fitted(s, reading.SupplyPressure) {
		supply = part{"supply " + r.value, r.ink}
		if !r.known {
			supply.text = "supply " + r.brief()
		}
	}
	inlet := valve(s, "inlet", reading.InletValve)
	vent, pump := valve(s, "vent", reading.VentValve), valve(s, "pump", reading.PumpValve)

	var middle part
	for _, m := range []struct {
		role reading.Role
		name string
	}{{reading.ManifoldPressure, "manifold"}, {reading.ControllerSensor, "controller"}} {
		if !fitted(s, m.role) {
			continue
		}
		r := show(s, m.role)
		middle = part{m.name + " " + r.value, r.ink}
		if !r.known {
			middle.text = m.name + " " + r.brief()
		}
		break
	}
	for x := 1; x < max(bx+3, a.W-18); x++ {
		a.Set(x, 0, '─', frame.Gas)
	}
	put := func(x int, p part) int {
		if p.text == "" {
			return x
		}
		return a.Text(x, 0, " "+p.text+" ", p.ink)
	}
	a.Set(ax, 0, '┴', frame.Gas)
	a.Set(bx, 0, '┴', frame.Gas)
	if a.Width(supply.text)+2 <= ax {
		put(0, supply)
	} else {
		put(0, part{"supply", frame.Faint})
	}
	x := put(ax+3, inlet)
	tail := a.Width(vent.text) + a.Width(pump.text) + 6
	from := max(bx+3, 0)
	if from+tail > a.W { // no room to the right of cell B: begin before it
		from = a.W - tail
	}
	put(put(from, vent)+1, pump)
	if mid := a.Width(middle.text); middle.text != "" && mid+2 <= bx-x {
		put(max(x+2, (x+bx-mid-2)/2), middle)
	}
}

// valve writes a valve and how it stands, where it reports that.
func valve(s *live.Snapshot, name string, role reading.Role) part {
	if !fitted(s, role) {
		return part{name, frame.Faint}
	}
	r := show(s, role)
	if !r.known {
		return part{name + " " + r.brief(), r.ink}
	}
	ink := frame.Plain
	if s.Latest[role].Value > 0.01 {
		ink = frame.Caution
	}
	return part{name + " " + r.value, ink}
}
