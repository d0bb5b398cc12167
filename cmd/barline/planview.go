package main

import (
	"fmt"
	"io"
	"math"
	"text/tabwriter"
	"time"

	"barline/model/emission"
	"barline/model/flow"
	"barline/model/gas"
	"barline/model/plan"
	"barline/model/unit"
)

// targetText writes a wavelength or a band.
func targetText(t gas.Span) string {
	if t.From == t.To {
		return fmt.Sprintf("%.4g nm", t.From.Nanometres())
	}
	return fmt.Sprintf("%.4g to %.4g nm", t.From.Nanometres(), t.To.Nanometres())
}

// writePlan says a plan in a person's words.
func writePlan(w io.Writer, p *plan.Plan, confirmed []plan.Confirmed, tolerance unit.Metre) {
	q := p.Question
	fmt.Fprintf(w, "Target %s, fibre at %v. Tried: %.3g to %.3g bar, %.3g to %.3g uJ in the fibre.\n",
		targetText(q.Target), q.Temperature, q.Pressure.From.Bar(), q.Pressure.To.Bar(), q.Energy.From.Microjoules(), q.Energy.To.Microjoules())
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	if len(p.Choices) > 0 {
		fmt.Fprintf(table, "\n\tgas\tpressure\tenergy\temission\tanswer\tnarrowest margin\n")
		for i, c := range p.Choices {
			fmt.Fprintf(table, "%d\t%s\t%s\t%s\t%s\t%v\t%s\n", i+1, c.Gas, pressureText(c), energyText(c), emissionText(c), c.Answer, c.Narrowest.Left())
		}
		flush(table)
		fmt.Fprintf(w, "\nTo stay within %.3g nm, each alone\n", tolerance.Nanometres())
		fmt.Fprintf(table, "\tgas\tnm per mbar\tnm per K\tnm per %% energy\tpressure within\ttemperature within\n")
		for i, c := range p.Choices {
			energy := "not known"
			if c.EnergyKnown {
				energy = fmt.Sprintf("%+.2g", c.PerEnergy*1e7)
			}
			fmt.Fprintf(table, "%d\t%s\t%+.3g\t%+.2g\t%s\t%s\t%s\n", i+1, c.Gas, c.PerPressure*1e11, c.PerTemperature*1e9, energy,
				within(c.PerPressure, tolerance, 1e-2, "mbar"), within(c.PerTemperature, tolerance, 1, "K"))
		}
		flush(table)
		writeFills(w, table, p.Choices)
		writeCautions(w, table, p.Choices)
		if p.Choices[0].Answer != emission.Anchored && len(confirmed) == 0 {
			fmt.Fprintln(w, "\nThe estimate is right to about 10 nm and does not know the slope over energy: --full asks propagation.")
		}
	}
	writeConfirmed(w, table, p, confirmed)
	if len(p.Refusals) > 0 {
		fmt.Fprintln(w, "\nDoes not reach it")
		for _, r := range p.Refusals {
			fmt.Fprintf(table, "  %s\t%s\n", r.Gas, r.Why)
		}
		flush(table)
	}
}

func pressureText(c plan.Choice) string {
	if c.From == c.To {
		return fmt.Sprintf("%.3g bar", c.Pressure.Bar())
	}
	return fmt.Sprintf("%.3g to %.3g bar", c.From.Bar(), c.To.Bar())
}

func energyText(c plan.Choice) string {
	return fmt.Sprintf("%.3g uJ (%.2g to %.2g)", c.Energy.Microjoules(), c.EnergyFrom.Microjoules(), c.EnergyTo.Microjoules())
}

func emissionText(c plan.Choice) string {
	give := math.Ceil(c.Prediction.Sigma.Nanometres())
	if c.From == c.To {
		return fmt.Sprintf("%.1f nm, +-%.0f", c.Prediction.Emission.Nanometres(), give)
	}
	text := targetText(c.Covers) + fmt.Sprintf(", +-%.0f", give)
	if !c.Whole {
		text = "only " + text
	}
	return text
}

// within says how steady a quantity must be, in a unit that is factor times the
// SI unit's inverse.
func within(slope float64, tolerance unit.Metre, factor float64, name string) string {
	if slope == 0 {
		return "any"
	}
	return fmt.Sprintf("%.2g %s", plan.Steady(slope, tolerance)*factor, name)
}

func writeFills(w io.Writer, table *tabwriter.Writer, choices []plan.Choice) {
	if choices[0].Fill == nil {
		fmt.Fprintln(w, "\nHow long purge and fill take needs a bench file with its [panel].")
		return
	}
	fmt.Fprintln(w, "\nFrom a panel full of air, by estimate")
	fmt.Fprintf(table, "\tgas\tpurge\tair left\tfill\tcore behind by\tgas, L at 0 °C and 1 atm\n")
	for i, c := range choices {
		f := c.Fill
		if f.Why != "" {
			fmt.Fprintf(table, "%d\t%s\t%s\n", i+1, c.Gas, f.Why)
			continue
		}
		fmt.Fprintf(table, "%d\t%s\t%d cycles, %s\t%v\t%s\t%s\t%.2f\n", i+1, c.Gas, f.Cycles, short(f.Purge), f.Air, short(f.Fill), short(f.Core), flow.NormLitres(f.Gas))
	}
	flush(table)
}

// short writes a duration as a person would.
func short(d time.Duration) string {
	switch {
	case d < 10*time.Second:
		return fmt.Sprintf("%.1f s", d.Seconds())
	case d < 10*time.Minute:
		return fmt.Sprintf("%.0f s", d.Seconds())
	}
	return d.Round(time.Minute).String()
}

func writeCautions(w io.Writer, table *tabwriter.Writer, choices []plan.Choice) {
	said := false
	for i, c := range choices {
		for _, l := range c.Cautions {
			if !said {
				fmt.Fprintln(w, "\nCautions")
				said = true
			}
			fmt.Fprintf(table, "%d\t%s\t%s\t%s\n", i+1, c.Gas, l.Name, l.Consequence)
		}
	}
	flush(table)
}

func writeConfirmed(w io.Writer, table *tabwriter.Writer, p *plan.Plan, confirmed []plan.Confirmed) {
	if len(confirmed) == 0 {
		return
	}
	fmt.Fprintln(w, "\nBy propagation")
	fmt.Fprintf(table, "\tgas\tat the plan's pressure\tcorrected\temission\twidth\tconversion\tnm per mbar\tnm per %% energy\tionised\n")
	for i, c := range confirmed {
		gas := p.Choices[i].Gas
		if c.First.Emission == 0 {
			fmt.Fprintf(table, "%d\t%s\tno emission: not confirmed\n", i+1, gas)
			continue
		}
		slopes := "-\t-"
		if c.SlopesKnown {
			slopes = fmt.Sprintf("%+.3g\t%+.2g", c.PerPressure*1e11, c.PerEnergy*1e7)
		}
		fmt.Fprintf(table, "%d\t%s\t%.1f nm\t%.4g bar\t%.1f nm\t%.1f nm\t%.2g %%\t%s\t%.2g %%\n", i+1, gas, c.First.Emission.Nanometres(),
			c.Pressure.Bar(), c.Light.Emission.Nanometres(), c.Light.Width.Nanometres(), 100*float64(c.Light.Conversion), slopes, 100*float64(c.Light.Ionised))
	}
	flush(table)
	for i, c := range confirmed {
		for _, l := range c.Limits {
			if !l.OK && l.Hard {
				fmt.Fprintf(w, "%d  %s: at the corrected pressure %s is %.4g %s, bound %.4g %s: %s.\n", i+1, p.Choices[i].Gas, l.Name, l.Value, l.Unit, l.Bound, l.Unit, l.Consequence)
			}
		}
		for _, r := range c.Light.Reasons {
			fmt.Fprintf(w, "%d  %s: not reliable: %s.\n", i+1, p.Choices[i].Gas, r)
		}
	}
}
