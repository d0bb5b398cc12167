package figure

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/png"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"barline/model/emission"
	"barline/model/plan"
	"barline/model/unit"
)

// slope is an invented map: the emission rises with pressure alone, low
// energies are forbidden, and so are pressures above 12 bar.
func slope() *plan.Map {
	m := &plan.Map{Gas: "argon", Answer: emission.Estimate}
	for i := range 30 {
		m.Pressures = append(m.Pressures, unit.Pascal(2*math.Pow(8, float64(i)/29))*unit.Bar)
	}
	for j := range 12 {
		m.Energies = append(m.Energies, unit.Joule(0.2e-6*math.Pow(10, float64(j)/11)))
	}
	for j := range m.Energies {
		var row []plan.Cell
		for _, p := range m.Pressures {
			c := plan.Cell{Emission: unit.Metre((150 + 12*p.Bar()) * 1e-9)}
			switch {
			case j < 4:
				c.Forbidden = "length to compression"
			case p > 12*unit.Bar:
				c.Forbidden = "pressure"
			}
			row = append(row, c)
		}
		m.Cells = append(m.Cells, row)
	}
	return m
}

type label struct {
	text string
	x, y float64 // y grows downwards
}

// labels reads all texts of an SVG.
func labels(t *testing.T, svg []byte) (list []label) {
	t.Helper()
	d := xml.NewDecoder(bytes.NewReader(svg))
	var at label
	inside := false
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return list
		}
		if err != nil {
			t.Fatalf("the picture is no XML: %v", err)
		}
		switch e := token.(type) {
		case xml.StartElement:
			if inside = e.Name.Local == "text"; inside {
				at = label{}
				for _, a := range e.Attr {
					v, _ := strconv.ParseFloat(a.Value, 64)
					switch a.Name.Local {
					case "x":
						at.x = v
					case "y":
						at.y = v
					}
				}
			}
		case xml.CharData:
			if inside {
				at.text += string(e)
			}
		case xml.EndElement:
			if e.Name.Local == "text" {
				list = append(list, at)
				inside = false
			}
		}
	}
}

func TestPlanMap(t *testing.T) {
	var out bytes.Buffer
	marks := []Mark{{Pressure: 9 * unit.Bar, Energy: 1e-6, Text: "9 bar, 1 uJ"}}
	if err := PlanMap(&out, "svg", slope(), 265e-9, 265e-9, marks); err != nil {
		t.Fatal(err)
	}
	list := labels(t, out.Bytes())
	find := func(text string) label {
		i := slices.IndexFunc(list, func(l label) bool { return strings.TrimSpace(l.text) == text })
		if i < 0 {
			t.Fatalf("no text %q among %v", text, list)
		}
		return list[i]
	}
	for _, want := range []string{
		"argon: emission over pressure and energy (estimate)", "absolute pressure (bar)", "pulse energy in the fibre (uJ)",
		"target 265 nm", "240 nm", "300 nm", "length to compression", "forbidden: length to compression", "forbidden: pressure", "9 bar, 1 uJ",
	} {
		find(want)
	}
	// The axes: ticks ascend and stand in equal ratios.
	two, five, ten := find("2"), find("5"), find("10")
	if !(two.x < five.x && five.x < ten.x) {
		t.Errorf("pressures 2, 5 and 10 bar stand at %g, %g and %g", two.x, five.x, ten.x)
	}
	if got, want := (ten.x-five.x)/(five.x-two.x), math.Log(2)/math.Log(2.5); math.Abs(got/want-1) > 0.05 {
		t.Errorf("spacing of the pressure ticks is as %.3f to 1, expected %.3f: equal ratios", got, want)
	}
	// The mark's name stands just right of 9 bar, just under 1 uJ.
	mark, half, one := find("9 bar, 1 uJ"), find("0.5"), find("1")
	if want := five.x + (ten.x-five.x)*math.Log(9.18/5)/math.Log(2); math.Abs(mark.x-want) > 8 {
		t.Errorf("the mark at 9 bar stands at %.0f, expected near %.0f", mark.x, want)
	}
	if math.Abs(mark.y-one.y) > 20 || math.Abs(mark.y-half.y) < 20 {
		t.Errorf("the mark at 1 uJ stands at %.0f, 1 uJ at %.0f and 0.5 uJ at %.0f", mark.y, one.y, half.y)
	}
	if strings.Contains(out.String(), "NaN") {
		t.Error("the picture holds NaN")
	}
}

func TestPlanMapRefusesAndDrawsPNG(t *testing.T) {
	if err := PlanMap(io.Discard, "svg", &plan.Map{}, 0, 0, nil); err == nil {
		t.Error("an empty map: accepted")
	}
	dark := slope()
	for j := range dark.Cells {
		for i := range dark.Cells[j] {
			dark.Cells[j][i] = plan.Cell{Forbidden: "no answer"}
		}
	}
	var out bytes.Buffer
	if err := PlanMap(&out, "png", dark, 265e-9, 300e-9, nil); err != nil {
		t.Fatal(err)
	}
	img, err := png.Decode(&out)
	if err != nil || img.Bounds().Dx() < 300 {
		t.Errorf("no picture: %v", err)
	}
}
