package figure

import (
	"bytes"
	"fmt"
	"os"
	"slices"
	"testing"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/gas"
	"barline/model/plan"
	"barline/model/unit"
)

// README's picture of a plan names what the plan of the sample bench names.
// Lines may differ by rounding from machine to machine; words may not.
func TestPictureOfAPlan(t *testing.T) {
	b, err := bench.Parse(bench.Sample(), "sample")
	if err != nil {
		t.Fatal(err)
	}
	s, err := emission.SetupFromBench(b)
	if err != nil {
		t.Fatal(err)
	}
	q := plan.Question{
		Setup: s, Gases: []string{"argon"}, Target: gas.Span{From: 265e-9, To: 265e-9}, Temperature: 293.15, Supply: b.Panel.Supply,
		Pressure: plan.Range[unit.Pascal]{From: 0.08 * unit.Bar, To: 16 * unit.Bar, Steps: 60},
		Energy:   plan.Range[unit.Joule]{From: 0.13e-6, To: 2.6e-6, Steps: 20},
	}
	p, err := q.Answer()
	if err != nil || len(p.Choices) != 1 {
		t.Fatalf("%+v, %v", p, err)
	}
	c := p.Choices[0]
	m, err := q.Survey("argon", plan.Range[unit.Pascal]{From: c.From / 3, To: 17.6 * unit.Bar, Steps: 140}, plan.Range[unit.Joule]{From: q.Energy.From, To: q.Energy.To, Steps: 70})
	if err != nil {
		t.Fatal(err)
	}
	var now bytes.Buffer
	mark := Mark{Pressure: c.Pressure, Energy: c.Energy, Text: fmt.Sprintf("%.3g bar", c.Pressure.Bar())}
	if err := PlanMap(&now, "svg", m, 265e-9, 265e-9, []Mark{mark}); err != nil {
		t.Fatal(err)
	}
	const path = "testdata/plan.svg"
	if *update {
		if err := os.WriteFile(path, now.Bytes(), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	was, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	words := func(svg []byte) (list []string) {
		for _, l := range labels(t, svg) {
			list = append(list, l.text)
		}
		slices.Sort(list)
		return list
	}
	if a, b := words(was), words(now.Bytes()); !slices.Equal(a, b) {
		t.Errorf("testdata/plan.svg says %q, the plan now says %q; rewrite it with -update", a, b)
	}
}
