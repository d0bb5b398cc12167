package main

import (
	"fmt"
	"io"
	"slices"
	"text/tabwriter"
	"time"

	"barline/model/drift"
	"barline/model/live"
)

// allanRow is one averaging time.
type allanRow struct {
	Over        number  `json:"over_s"`
	Deviation   number  `json:"overlapping"`
	Modified    *number `json:"modified"`
	Independent int     `json:"groups"`
}

// allan prints the Allan deviation of a quantity over a stretch: how much
// means over a time differ from one to the next.
func (r *resting) allan(quantity string, over stretch, w io.Writer, asJSON bool) error {
	var of func(i int) (float64, bool)
	scale, in := 1e9, "nm"
	switch quantity {
	case "emission":
		of = func(i int) (float64, bool) { return r.data[i].EmissionM, r.data[i].EmissionM > 0 }
	case "residual":
		of = func(i int) (float64, bool) {
			return r.means[i].Value[drift.Wavelength], r.means[i].Count[drift.Wavelength] > 0
		}
	case "pressure":
		of = func(i int) (float64, bool) { return r.data[i].PressurePa, true }
		scale, in = 1e-2, "mbar"
	default:
		return usage("--allan %q: expected emission, residual or pressure", quantity)
	}
	values, spacing, from, to := r.longestRun(over, of)
	const fewest = 8
	if len(values) < fewest {
		return fmt.Errorf("the longest run without a gap has %d means, expected at least %d: %w", len(values), fewest, drift.ErrShort)
	}
	var rows []allanRow
	for m := 1; 2*m < len(values); m *= 2 {
		d, err := drift.AllanOverlapping(values, m)
		if err != nil {
			break
		}
		row := allanRow{Over: number(spacing.Seconds() * float64(m)), Deviation: number(d * scale), Independent: len(values) / m}
		if mod, err := drift.AllanModified(values, m); err == nil {
			n := number(mod * scale)
			row.Modified = &n
		}
		rows = append(rows, row)
	}
	if asJSON {
		return writeObject(w, struct {
			Quantity string     `json:"quantity"`
			Unit     string     `json:"unit"`
			From     time.Time  `json:"from"`
			To       time.Time  `json:"to"`
			Means    int        `json:"means"`
			Rows     []allanRow `json:"rows"`
		}{quantity, in, from, to, len(values), rows})
	}
	fmt.Fprintf(w, "Allan deviation of %s, %s to %s UTC, %d means of %v\n", quantity, from.Format("2006-01-02 15:04"), to.Format("15:04"), len(values), spacing)
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(table, "over\toverlapping\tmodified\tgroups\t")
	for _, row := range rows {
		mod := "-"
		if row.Modified != nil {
			mod = fmt.Sprintf("%.4g %s", float64(*row.Modified), in)
		}
		fmt.Fprintf(table, "%g s\t%.4g %s\t%s\t%d\t\n", float64(row.Over), float64(row.Deviation), in, mod, row.Independent)
	}
	return table.Flush()
}

// longestRun returns the longest run of means of a stretch without a gap.
func (r *resting) longestRun(over stretch, of func(int) (float64, bool)) (values []float64, spacing time.Duration, from, to time.Time) {
	spacing = live.BinEvery
	var run []float64
	began := 0
	last := -1
	for i := range r.means {
		v, ok := of(i)
		if !ok || !over.holds(r.at[i]) {
			continue
		}
		if last < 0 || r.at[i].Sub(r.at[last]) > spacing*3/2 {
			run, began = nil, i
		}
		run, last = append(run, v), i
		if len(run) > len(values) {
			values, from, to = slices.Clone(run), r.at[began], r.at[i]
		}
	}
	return values, spacing, from, to
}

// median returns the middle of a list, which it sorts.
func median(list []float64) float64 {
	slices.Sort(list)
	return list[len(list)/2]
}
