package tui

import (
	"fmt"
	"math"

	"barline/model/live"
	"barline/model/plan"
	"barline/model/unit"
	"barline/tui/frame"
)

const (
	formWidth  = 66
	formHeight = 7
	planHeight = 15 // of the map under a form, its axis and key included
	planLabel  = 9  // columns for the energies
	planBelow  = 4  // rows for axis and key
)

// formBox is the box of a form, with room for the plan's map where there is
// one and the screen is high enough. form is the upper part.
func formBox(a frame.Area, title string, v view) (form, below frame.Area, ok bool) {
	if v.planned == nil || a.H < formHeight+planHeight+2 || a.W < formWidth+4 {
		return box(a, title, formWidth, formHeight, frame.Target), frame.Area{}, false
	}
	b := box(a, title, formWidth, formHeight+planHeight, frame.Target)
	return b.Sub(0, 0, b.W, formHeight), b.Sub(0, formHeight, b.W, planHeight), true
}

// drawPlan draws emission over pressure and energy under a form: lines of equal
// emission, what is asked for among them, what a bound forbids by a letter, and
// where the bench stands. wanted is 0 where no wavelength is asked for, at 0
// where no pressure is.
func drawPlan(a frame.Area, m *plan.Map, s *live.Snapshot, wanted unit.Metre, at unit.Pascal) {
	w, h := a.W-planLabel, a.H-planBelow
	if w < 10 || h < 3 || len(m.Pressures) < 2 || len(m.Energies) < 2 {
		return
	}
	a.Text(0, 0, "emission over pressure and pulse energy, by "+m.Answer.String(), frame.Faint)
	field := a.Sub(planLabel, 1, w, h)
	var names []string
	for y := range h {
		j := (h - 1 - y) * (len(m.Energies) - 1) / (h - 1)
		if y%3 == 0 {
			a.Right(planLabel-1, 1+y, fixed(m.Energies[j].Microjoules(), 2)+" µJ", frame.Faint)
		}
		for x := range w {
			c, next := m.Cells[j][x*(len(m.Pressures)-1)/(w-1)], m.Cells[j][min(x+1, w-1)*(len(m.Pressures)-1)/(w-1)]
			switch {
			case passes(c, next, wanted):
				field.Set(x, y, '◇', frame.Predicted)
			case c.Forbidden != "":
				field.Set(x, y, letter(&names, c.Forbidden), frame.Faint)
			case tens(c, next) > 0:
				field.Set(x, y, '│', frame.Rule)
			}
		}
	}
	column := func(p unit.Pascal) (int, bool) {
		from, to := float64(m.Pressures[0]), float64(m.Pressures[len(m.Pressures)-1])
		x := int(math.Round(math.Log(float64(p)/from) / math.Log(to/from) * float64(w-1)))
		return x, float64(p) >= from && float64(p) <= to
	}
	if x, ok := column(at); ok {
		for y := range h {
			if field.At(x, y).Rune != '◇' {
				field.Set(x, y, '┆', frame.Target)
			}
		}
	}
	from, to := float64(m.Energies[0]), float64(m.Energies[len(m.Energies)-1])
	if e := float64(s.Prediction.Input.Energy); s.CoreKnown && e >= from && e <= to {
		if x, ok := column(s.Core); ok {
			field.Set(x, h-1-int(math.Round(math.Log(e/from)/math.Log(to/from)*float64(h-1))), '●', frame.Measured)
		}
	}
	for _, bar := range [...]unit.Pascal{1, 2, 3, 4, 5, 6, 8, 10, 12, 15, 20, 30, 40} {
		if x, ok := column(bar * unit.Bar); ok && x < w-2 {
			a.Text(planLabel+x, h+1, fixed(float64(bar), 0), frame.Faint)
		}
	}
	a.Right(planLabel-1, h+1, "bar", frame.Faint)
	key := "│ every 20 nm  ● the bench"
	if wanted > 0 {
		key = fmt.Sprintf("◇ %s nm  ", fixed(wanted.Nanometres(), 1)) + key
	}
	a.Text(0, h+2, key, frame.Faint)
	x := 0
	for _, name := range names {
		x = a.Text(x, h+3, string(letter(&names, name))+" "+name+"  ", frame.Faint)
	}
}

// passes reports whether the emission passes lambda between two cells.
func passes(c, next plan.Cell, lambda unit.Metre) bool {
	return lambda > 0 && c.Emission > 0 && next.Emission > 0 && c.Emission != next.Emission && (c.Emission <= lambda) != (next.Emission <= lambda) && !jumps(c, next)
}

// tens returns the multiple of 20 nm that the emission passes between two
// cells, 0 for none.
func tens(c, next plan.Cell) int {
	a, b := int(c.Emission.Nanometres()/20), int(next.Emission.Nanometres()/20)
	if c.Emission == 0 || next.Emission == 0 || a == b || jumps(c, next) {
		return 0
	}
	return max(a, b)
}

// jumps reports whether two neighbours lie on different branches.
func jumps(c, next plan.Cell) bool {
	return math.Abs(float64(next.Emission-c.Emission)) > 0.12*float64(c.Emission)
}

// letter returns the letter of a name, which is added where it is new.
func letter(names *[]string, name string) rune {
	for i, n := range *names {
		if n == name {
			return rune('a' + i)
		}
	}
	*names = append(*names, name)
	return rune('a' + len(*names) - 1)
}
