package tui

import (
	"math"
	"strings"
	"testing"

	"barline/model/emission"
	"barline/model/plan"
	"barline/model/unit"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

// planned is an invented map: 150 nm and 12 nm more for each bar, low energies
// forbidden.
func planned() *plan.Map {
	m := &plan.Map{Gas: "argon", Answer: emission.Estimate}
	for i := range 90 {
		m.Pressures = append(m.Pressures, unit.Pascal(1.6*math.Pow(10, float64(i)/89))*unit.Bar)
	}
	for j := range 12 {
		m.Energies = append(m.Energies, unit.Joule(0.3e-6*math.Pow(8, float64(j)/11)))
		var row []plan.Cell
		for _, p := range m.Pressures {
			c := plan.Cell{Emission: unit.Metre((150 + 12*p.Bar()) * 1e-9)}
			if j < 4 {
				c.Forbidden = "length to compression"
			}
			row = append(row, c)
		}
		m.Cells = append(m.Cells, row)
	}
	return m
}

func TestFormsShowThePlan(t *testing.T) {
	s := tuitest.Calm()
	for _, c := range []struct {
		overlay overlay
		text    string
		want    []string
	}{
		{tuneOverlay, "262 nm", []string{"◇ 262.0 nm", "emission over pressure and pulse energy, by estimate", "a length to compression", "µJ", "bar", "┆", "●"}},
		{setpointOverlay, "9 bar", []string{"every 20 nm", "a length to compression", "┆"}},
	} {
		v := view{overlay: c.overlay, text: c.text, planned: planned()}
		high := frame.New(120, 40, frame.Style{})
		drawOverlay(high.Area(), s, v)
		for _, want := range c.want {
			if !strings.Contains(high.String(), want) {
				t.Errorf("%v: no %q in\n%s", c.overlay, want, high)
			}
		}
		// A low screen shows the form as it was.
		low, plain := frame.New(80, 24, frame.Style{}), frame.New(80, 24, frame.Style{})
		drawOverlay(low.Area(), s, v)
		v.planned = nil
		drawOverlay(plain.Area(), s, v)
		if v.overlay == tuneOverlay && low.String() == plain.String() {
			continue
		}
		if strings.Contains(plain.String(), "every 20 nm") {
			t.Errorf("a map without a plan:\n%s", plain)
		}
	}
}

// The line of the wanted wavelength stands at its pressure: 9.33 bar for 262 nm.
func TestPlanLineStandsAtItsPressure(t *testing.T) {
	f := frame.New(80, 20, frame.Style{})
	m := planned()
	drawPlan(f.Area(), m, tuitest.Calm(), 262e-9, 0)
	w := 80 - planLabel
	want := planLabel + int(math.Round(math.Log((262.0-150)/12/1.6)/math.Log(10)*float64(w-1)))
	seen := 0
	for y := 1; y < 16; y++ {
		for x := range 80 {
			if f.At(x, y).Rune == '◇' {
				seen++
				if x < want-2 || x > want+2 {
					t.Errorf("row %d: the line stands in column %d, expected near %d", y, x, want)
				}
			}
		}
	}
	if seen < 10 {
		t.Errorf("the line has %d places, expected one a row", seen)
	}
	// No map is no picture, and nothing is drawn outside a small area.
	drawPlan(f.Area().Sub(0, 0, 12, 4), m, tuitest.Calm(), 0, 0)
	drawPlan(f.Area(), &plan.Map{}, tuitest.Calm(), 0, 0)
}
