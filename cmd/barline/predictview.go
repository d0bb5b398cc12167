package main

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"
	"strings"
	"text/tabwriter"

	"barline/model/emission"
	"barline/model/fibre"
	"barline/model/gas"
)

// writePrediction says a prediction in a person's words.
func writePrediction(w io.Writer, p *emission.Predictor, pr emission.Prediction, explain bool) {
	s, m := p.Setup(), p.Medium()
	if pr.Emission > 0 {
		answer := pr.Answer.String()
		if c := calibrationText(pr); c != "" {
			answer += ", calibration " + c
		}
		fmt.Fprintf(w, "Emission %.1f nm, give or take %.1f nm (%s).\n\n", pr.Emission.Nanometres(), pr.Sigma.Nanometres(), answer)
	} else {
		fmt.Fprintf(w, "No emission: %s (%s).\n\n", pr.Why, pr.Answer)
	}
	if pr.Answer == emission.Anchored {
		for _, b := range pr.Branches[:pr.BranchCount] {
			fmt.Fprintf(w, "  %.1f nm, %.2f %% of the output\n", b.Emission.Nanometres(), 100*float64(b.Conversion))
		}
		fmt.Fprintln(w)
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	row := func(name, format string, args ...any) {
		fmt.Fprintf(table, "%s\t%s\n", name, fmt.Sprintf(format, args...))
	}
	row("gas", "%s at %v and %v, %.5g mol/m3", m.Name(), pr.Input.Pressure, pr.Input.Temperature, float64(pr.Density))
	if pr.Input.Air > 0 {
		row("air in the gas", "%.4g ppm", float64(pr.Input.Air)*1e6)
	}
	wall := ""
	if s.Fibre.Wall > 0 {
		wall = fmt.Sprintf(", wall %v", s.Fibre.Wall)
	}
	row("fibre", "%v, core %v%s, length %v, mode %v, effective area %.4g um2", s.Fibre.Kind, s.Fibre.CoreDiameter, wall, s.Fibre.Length, s.Fibre.Mode, pr.EffectiveArea*1e12)
	row("pulse", "%v, %.4g fs %s, %.4g uJ, %.4g MW at the peak", s.Pulse.Wavelength, s.Pulse.Duration.Femtoseconds(), shapeName(s), pr.Input.Energy.Microjoules(), float64(pr.PeakPower)*1e-6)
	row("index - 1", "%.5e of the gas, %.5e of the mode", pr.IndexMinusOne, pr.EffectiveIndexMinusOne)
	row("dispersion", "beta1 %.8g fs/mm, beta2 %.5g fs2/m, beta3 %.5g fs3/m", pr.Beta1*1e12, pr.Beta2*1e30, pr.Beta3*1e45)
	row("zero dispersion", "%s", zeros(pr))
	row("nonlinearity", "n2 %.4g m2/W, gamma %.4g 1/(W m)", float64(pr.N2), pr.Gamma)
	row("soliton order", "%.2f", pr.SolitonOrder)
	if pr.FissionLength > 0 {
		row("lengths", "dispersion %.3g m, fission %.3g m", float64(pr.DispersionLength), float64(pr.FissionLength))
	} else {
		row("lengths", "dispersion %.3g m", float64(pr.DispersionLength))
	}
	row("sources", "density %s, index %s, n2 %s", m.DensitySource().Name, m.IndexSource().Name, m.KerrSource().Name)
	flush(table)

	fmt.Fprintln(w, "\nLimits")
	for _, v := range pr.Verdicts[:pr.VerdictCount] {
		word, tail := "ok", ""
		if !v.OK {
			word, tail = "NOT", "\t"+v.Consequence
		}
		fmt.Fprintf(table, "  %s\t%s\t%.4g %s\tbound %.4g %s%s\n", word, v.Name, v.Value, v.Unit, v.Bound, v.Unit, tail)
	}
	flush(table)
	if explain {
		writeExplanation(w, p, pr)
	}
}

// flush empties a table into its writer, which keeps an error until its own
// flush reports it.
func flush(t *tabwriter.Writer) { _ = t.Flush() }

func shapeName(s emission.Setup) string {
	if s.Pulse.Shape == 0 {
		return "sech2"
	}
	return "gauss"
}

func zeros(pr emission.Prediction) string {
	if pr.ZeroDispersionCount == 0 {
		return "none in the bands"
	}
	var list []string
	for _, z := range pr.ZeroDispersion[:pr.ZeroDispersionCount] {
		list = append(list, fmt.Sprintf("%.2f nm", z.Nanometres()))
	}
	return strings.Join(list, ", ")
}

// writeExplanation says where each number comes from.
func writeExplanation(w io.Writer, p *emission.Predictor, pr emission.Prediction) {
	m, s := p.Medium(), p.Setup()
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	row := func(name, text string) { fmt.Fprintf(table, "  %s\t%s\n", name, text) }
	source := func(name string, x gas.Source) {
		row(name, x.Citation)
		if x.Caution != "" {
			row("", "caution: "+x.Caution)
		}
	}
	fmt.Fprintln(w, "\nWhere the numbers come from")
	source("density", m.DensitySource())
	source("index", m.IndexSource())
	pub, chk := m.Published(), m.Checked()
	row("", fmt.Sprintf("published %.5g to %.5g nm, checked %s", pub.From.Nanometres(), pub.To.Nanometres(), checkedSpan(chk)))
	row("", "scaled by Lorentz-Lorenz: (n2-1)/(n2+2) goes with molar density (Born & Wolf, Principles of Optics, 2.3.3)")
	row("effective index", modeFormula(s.Fibre.Kind))
	row("dispersion", "derivatives of beta = n_eff*omega/c, exact to the third order")
	row("n2", m.KerrSource().Citation)
	row("gamma, N", "gamma = n2*omega0/(c*A_eff), N^2 = gamma*P0*T0^2/|beta2| (Agrawal, Nonlinear Fiber Optics)")
	row("fission length", "T0^2/|beta2|/N; compression near 0.58 + 1.55/N of it (own fit to full-field runs)")
	row("emission", answerFormula(pr.Answer))
	row("ionisation", "Perelomov-Popov-Terent'ev rate (Sov. Phys. JETP 23, 924 (1966)), "+s.Plasma.String()+"; rough: at 7 times the peak power")
	flush(table)

	if list := p.Breakdown(pr); len(list) > 0 {
		fmt.Fprintln(w, "\nWhat makes up the uncertainty (one standard deviation each)")
		for _, c := range list {
			mark := ""
			if c.Rough {
				mark = "rough"
			}
			fmt.Fprintf(table, "  %.3f nm\t%s\t%s\t%s\n", c.Effect.Nanometres(), c.Name, c.Input, mark)
		}
		flush(table)
	}
	if list := p.Steadiness(pr, steadyFor); len(list) > 0 {
		fmt.Fprintf(w, "\nTo hold the emission within %.1f nm, each alone must stay within\n", steadyFor.Nanometres())
		for _, s := range list {
			fmt.Fprintf(table, "  %s\t%s\n", s.Quantity, s.Text)
		}
		flush(table)
	}
}

func checkedSpan(s gas.Span) string {
	if s.To == 0 {
		return "nowhere within 5 %"
	}
	return fmt.Sprintf("%.4g to %.4g nm", s.From.Nanometres(), s.To.Nanometres())
}

func modeFormula(k fibre.Kind) string {
	switch k {
	case fibre.Kagome:
		return "capillary with a(lambda) = a0/(1 + s*lambda^2/(a0*t)) (Opt. Lett. 39, 821 (2014))"
	case fibre.Antiresonant:
		return "capillary less the pull of one thin wall, bounded at its resonances (Sci. Rep. 7, 11761 (2017)); glass: Malitson (1965)"
	}
	return "n_eff^2 = n^2 - (u*c/(a*omega))^2 (Bell Syst. Tech. J. 43, 1783 (1964))"
}

func answerFormula(a emission.Answer) string {
	switch a {
	case emission.Linear:
		return "beta(omega) - beta0 - beta1*(omega-omega0) = 0: no nonlinear term"
	case emission.Anchored:
		return "beta(omega) - beta0 - beta1*(omega-omega0) = kappa, interpolated between full-field runs of this bench"
	}
	return "beta(omega) - beta0 - beta1*(omega-omega0) = 0.496*gamma*P0*(omega*T0)^(2/3) (own fit to 212 full-field runs)"
}

// predictSweep prints one prediction per step.
func predictSweep(w io.Writer, p *emission.Predictor, use *useCalibration, in emission.Input, run *sweep, asJSON, asCSV, explain bool) error {
	var before emission.Prediction
	next := func(in emission.Input) emission.Prediction {
		before = use.predict(p, in, &before)
		return before
	}
	if asJSON {
		return run.each(in, func(in emission.Input) error { return writeObject(w, predicted(p, next(in), explain)) })
	}
	header := []string{"pressure_bar", "temperature_K", "energy_uJ", "air_ppm", "emission_nm", "emission_sigma_nm", "zero_dispersion_nm", "beta2_fs2_m", "soliton_order", "fission_length_m", "why"}
	if use.corrector != nil {
		header = append(header, "calibration", "beyond_calibration")
	}
	cells := func(pr emission.Prediction) []string {
		row := []string{digits(pr.Input.Pressure.Bar(), 6), digits(float64(pr.Input.Temperature), 6), digits(pr.Input.Energy.Microjoules(), 5), digits(float64(pr.Input.Air)*1e6, 4)}
		blank := func(v float64, n int, has bool) string {
			if !has {
				return ""
			}
			return digits(v, n)
		}
		zero := ""
		if pr.ZeroDispersionCount > 0 {
			var list []string
			for _, z := range pr.ZeroDispersion[:pr.ZeroDispersionCount] {
				list = append(list, strconv.FormatFloat(z.Nanometres(), 'f', 2, 64))
			}
			zero = strings.Join(list, " ")
		}
		row = append(row, blank(pr.Emission.Nanometres(), 6, pr.Emission > 0), blank(pr.Sigma.Nanometres(), 3, pr.Emission > 0), zero,
			blank(pr.Beta2*1e30, 6, pr.Valid), blank(pr.SolitonOrder, 5, pr.Valid), blank(float64(pr.FissionLength), 4, pr.FissionLength > 0), pr.Why)
		if use.corrector != nil {
			row = append(row, pr.Calibration, strconv.FormatBool(pr.Beyond))
		}
		return row
	}
	if asCSV {
		out := csv.NewWriter(w)
		if err := out.Write(header); err != nil {
			return err
		}
		err := run.each(in, func(in emission.Input) error { return out.Write(cells(next(in))) })
		out.Flush()
		if err == nil {
			err = out.Error()
		}
		return err
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(table, run.name+"\temission\tgive or take\tbeta2\tN\tfission\t")
	err := run.each(in, func(in emission.Input) error {
		pr := next(in)
		step := sweptText(run.name, in)
		if pr.Emission == 0 {
			fmt.Fprintf(table, "%s\t-\t-\t%.1f fs2/m\t%.2f\t-\t %s\n", step, pr.Beta2*1e30, pr.SolitonOrder, pr.Why)
			return nil
		}
		_, err := fmt.Fprintf(table, "%s\t%.1f nm\t%.1f nm\t%.1f fs2/m\t%.2f\t%.3g m\t %s\n", step, pr.Emission.Nanometres(), pr.Sigma.Nanometres(), pr.Beta2*1e30, pr.SolitonOrder, float64(pr.FissionLength), beyondText(pr))
		return err
	})
	flush(table)
	return err
}

func sweptText(name string, in emission.Input) string {
	switch name {
	case "temperature":
		return in.Temperature.String()
	case "energy":
		return fmt.Sprintf("%.4g uJ", in.Energy.Microjoules())
	case "air":
		return fmt.Sprintf("%.4g ppm", float64(in.Air)*1e6)
	}
	return in.Pressure.String()
}

func digits(v float64, n int) string { return strconv.FormatFloat(v, 'g', n, 64) }
