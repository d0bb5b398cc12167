package main

import (
	"fmt"
	"io"
	"text/tabwriter"
)

// write says a run in a person's words.
func (d *propagated) write(w io.Writer) {
	r, s := d.result, d.from.setup
	l, ok := r.Emission()
	if ok {
		fmt.Fprintf(w, "Emission %.1f nm, peak %.1f nm, width %.1f nm, %.2f %% of the output.\n",
			l.Centroid.Nanometres(), l.Peak.Nanometres(), l.Width.Nanometres(), 100*l.Conversion)
	} else {
		fmt.Fprintln(w, "No emission: no lobe holds a thousandth of the output.")
	}
	for _, other := range r.Lobes[min(1, len(r.Lobes)):] {
		fmt.Fprintf(w, "Also %.1f nm, %.2f %% of the output.\n", other.Centroid.Nanometres(), 100*other.Conversion)
	}
	if !r.Reliable {
		fmt.Fprintln(w, "\nNot to be trusted:")
		for _, reason := range r.Reasons {
			fmt.Fprintln(w, "  "+reason)
		}
	}
	fmt.Fprintln(w)
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	row := func(name, format string, args ...any) {
		fmt.Fprintf(table, "%s\t%s\n", name, fmt.Sprintf(format, args...))
	}
	wall := ""
	if s.Fibre.Wall > 0 {
		wall = fmt.Sprintf(", wall %v", s.Fibre.Wall)
	}
	row("gas", "%s at %v and %v", d.from.medium.Name(), d.prediction.Input.Pressure, d.prediction.Input.Temperature)
	row("fibre", "%v, core %v%s, length %v, loss %.4g dB/m", s.Fibre.Kind, s.Fibre.CoreDiameter, wall, s.Fibre.Length, float64(s.Fibre.Loss.Constant))
	row("pulse", "%v, %.4g fs %s, %.4g MW at the peak as it enters", s.Pulse.Wavelength, s.Pulse.Duration.Femtoseconds(), shapeName(s), float64(r.PulsePower)*1e-6)
	row("energy", "%.4g uJ in, %.4g uJ out, %.4g uJ of it below 400 nm", r.EnergyIn.Microjoules(), r.EnergyOut.Microjoules(), r.Ultraviolet.Microjoules())
	row("compression", "after %.1f mm, to %.4g MW", 1e3*float64(r.Compression), float64(r.CompressedPower)*1e-6)
	row("ionised", "%.3g %% of the atoms at most (%v)", 100*r.Ionised, r.Setup.Plasma)
	row("soliton order", "%.2f", d.prediction.SolitonOrder)
	short, long := r.Grid.Wavelengths()
	row("grid", "%d points of %.4g fs, %v to %v", r.Grid.Points, r.Grid.Step.Femtoseconds(), short, long)
	row("error", "tolerance %.2g a step; %.2g %% of the energy unaccounted for, %.2g %% at the ends of time, %.2g %% at the edges of the band",
		r.Tolerance, 100*r.Balance, 100*r.TimeEdge, 100*r.BandEdge)
	row("work", "%d steps, %d evaluations, %.2f s", r.Steps, r.Evaluated, d.seconds)
	flush(table)
	for _, note := range r.Notes {
		fmt.Fprintln(w, "\nNote: "+note+".")
	}
}
