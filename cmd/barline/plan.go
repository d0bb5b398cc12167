package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"barline/model/bench"
	"barline/model/emission"
	"barline/model/flow"
	"barline/model/gas"
	"barline/model/plan"
	"barline/model/unit"
	"barline/tui/figure"
)

// planFlags are the flags of plan beside those it shares.
type planFlags struct {
	inputs
	target, pressures, energies string
	tolerance, purgeTo          string
	full, json                  bool
	best                        int
	plot                        string
}

func newPlan() *cobra.Command {
	var f planFlags
	cmd := &cobra.Command{
		Use:   "plan",
		Short: "Say which gas, pressure and energy reach a wavelength, and with what margins",
		Long: `Say which gas, at which pressure and with how much energy, puts the emission at
a wavelength or turns it through a band, and what stands in the way.

    barline plan -b bench.toml --target 265nm
    barline plan -b bench.toml --target 240nm:280nm --gas "argon, krypton" --plot map.svg
    barline plan --target 220nm --core-diameter "34 um" --length "30 cm" \
        --wavelength "1030 nm" --duration "35 fs" --energy "1.5 uJ"

All pure gases are tried, or those of --gas. Choices with fewer cautions come
first, then those whose narrowest margin is wider, then those that take less
gas. With --emission anchored the best few stand on full-field runs around them;
--full confirms the best few by propagation, corrects their pressure and measures
their slopes.`,
		Args: noArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			return f.run(cmd.Context(), cmd.OutOrStdout(), cmd.ErrOrStderr())
		},
	}
	f.bind(cmd)
	fl := cmd.Flags()
	fl.Lookup("gas").Usage = `gases to try, such as "argon, krypton"; without it all pure ones`
	fl.Lookup("pressure").Hidden = true // it is what is looked for
	fl.StringVar(&f.target, "target", "", `the wavelength, or the band to be turned through: 265nm, 240nm:280nm`)
	fl.StringVar(&f.pressures, "pressures", "", "pressures to try, such as 1bar:12bar; without it up to the lowest rating")
	fl.StringVar(&f.energies, "energies", "", "energies to try, such as 0.3uJ:2uJ; without it from a tenth of the pulse energy to what the bench file allows, or twice")
	fl.StringVar(&f.tolerance, "tolerance", "0.2 nm", "for how steady things must be held")
	fl.StringVar(&f.purgeTo, "purge-to", "100 ppm", "share of air that the purge must leave")
	fl.BoolVar(&f.full, "full", false, "confirm the best few by full-field propagation, about ten seconds each")
	fl.IntVar(&f.best, "best", 3, "how many --full and --emission anchored look at")
	fl.BoolVar(&f.json, "json", false, "print the result as one JSON object")
	fl.StringVar(&f.plot, "plot", "", "draw the best gas's map to a file that ends in .svg or .png")
	return cmd
}

func (f *planFlags) run(ctx context.Context, stdout, stderr io.Writer) error {
	q, answer, err := f.question()
	if err != nil {
		return err
	}
	tolerance, err := unit.ParseLength(f.tolerance)
	switch {
	case err != nil:
		return usage("--tolerance: %w", err)
	case !(tolerance > 0):
		return usage("--tolerance %v: expected above zero", tolerance)
	case f.best < 1 || f.best > 10:
		return usage("--best %d: expected 1 to 10", f.best)
	case f.plot != "" && !slices.Contains(figure.Formats, strings.TrimPrefix(filepath.Ext(f.plot), ".")):
		return usage("--plot %q: expected a file that ends in .svg or .png", f.plot)
	}
	p, err := q.Answer()
	if err != nil {
		return usage("%w", err)
	}
	if answer == emission.Anchored {
		if err := anchorChoices(ctx, stderr, p, f.best); err != nil {
			return err
		}
	}
	var confirmed []plan.Confirmed
	if f.full {
		if confirmed, err = confirm(ctx, stderr, p, f.best); err != nil {
			return err
		}
	}
	out := bufio.NewWriter(stdout)
	if f.json {
		err = writeObject(out, planned(p, confirmed, tolerance))
	} else {
		writePlan(out, p, confirmed, tolerance)
	}
	if f.plot != "" {
		err = errors.Join(err, drawPlan(f.plot, p))
	}
	if err := errors.Join(err, out.Flush()); err != nil {
		return err
	}
	if len(p.Choices) == 0 {
		return fmt.Errorf("nothing reaches %s: %s", targetText(q.Target), nearestText(p))
	}
	return nil
}

// nearestText says what is nearest to giving way.
func nearestText(p *plan.Plan) string {
	if r, ok := p.Nearest(); ok {
		return "with " + r.Gas + ", " + r.Why
	}
	away, best := 0.0, plan.Refusal{}
	for _, r := range p.Refusals {
		if e := r.Nearest.Emission; e > 0 {
			d := max(float64(p.Question.Target.From-e), float64(e-p.Question.Target.To))
			if best.Gas == "" || d < away {
				best, away = r, d
			}
		}
	}
	if best.Gas == "" {
		if len(p.Refusals) == 1 {
			return p.Refusals[0].Why
		}
		return "no gas emits within the bounds"
	}
	return fmt.Sprintf("the nearest is %s with %.1f nm, %.1f nm away, and no bound that gave way would change that",
		best.Gas, best.Nearest.Emission.Nanometres(), away*1e9)
}

// question reads the flags and the bench file. The answer that was asked for
// is beside it: the question itself starts from the estimate at most.
func (f *planFlags) question() (q plan.Question, answer emission.Answer, err error) {
	if f.given("pressure") {
		return q, 0, usage("--pressure: plan looks for the pressure; --pressures FROM:TO bounds it")
	}
	shared := f.inputs
	shared.gas = "" // a list here; the bench's own gas keeps its sources
	setup, input, err := shared.setup("plan", "pressure", "gas")
	if err != nil {
		return q, 0, err
	}
	answer = setup.Answer
	setup.Answer = min(answer, emission.Estimate)
	q = plan.Question{Setup: setup, Temperature: input.Temperature, Air: input.Air}
	if f.gas != "" {
		for _, name := range strings.Split(f.gas, ",") {
			name = strings.TrimSpace(name)
			if name == "" || slices.Contains(q.Gases, name) {
				return q, 0, usage(`--gas %q: expected gases that differ, such as "argon, krypton"`, f.gas)
			}
			q.Gases = append(q.Gases, name)
		}
		if setup.Gas.Composition == "" { // --index and --n2 are meant for it
			q.Setup.Gas.Composition = q.Gases[0]
		}
	} else if setup.Gas.Composition != "" { // the bench's own first
		q.Gases = append(q.Gases, setup.Gas.Composition)
		for _, name := range plan.Gases() {
			if name != setup.Gas.Composition {
				q.Gases = append(q.Gases, name)
			}
		}
	}
	if q.Target, err = parseTarget(f.target); err != nil {
		return q, 0, err
	}
	most, brightest := unit.Pascal(40*unit.Bar), 2*setup.Pulse.Energy
	if f.bench != "" {
		if most, brightest, err = f.site(&q); err != nil {
			return q, 0, err
		}
	}
	q.Pressure = plan.Range[unit.Pascal]{From: most / 200, To: most, Steps: planPressures}
	q.Energy = plan.Range[unit.Joule]{From: setup.Pulse.Energy / 10, To: brightest, Steps: planEnergies}
	if err := parseRange("pressures", f.pressures, unit.ParsePressure, &q.Pressure); err != nil {
		return q, 0, err
	}
	return q, answer, parseRange("energies", f.energies, unit.ParseEnergy, &q.Energy)
}

// Steps of the map.
const (
	planPressures = 60
	planEnergies  = 20
)

// site adds the gas panel of the bench file, and returns the highest pressure
// and pulse energy that it allows.
func (f *planFlags) site(q *plan.Question) (unit.Pascal, unit.Joule, error) {
	_, b, err := readBench(f.bench)
	if err != nil {
		return 0, 0, err
	}
	want, err := unit.ParseFraction(f.purgeTo)
	if err != nil {
		return 0, 0, usage("--purge-to: %w", err)
	}
	handling, err := flow.BenchHandling(b, q.Temperature)
	if err != nil {
		return 0, 0, err
	}
	core, cladding, err := flow.BenchFibre(b, q.Temperature)
	if err != nil {
		return 0, 0, err
	}
	core.Radius, core.Length = q.Setup.Fibre.CoreDiameter/2, q.Setup.Fibre.Length // flags stand over the file
	rating := b.Limits.Enforced().Lowest().Max
	low, high := purgeBetween(b, rating)
	q.Supply = b.Panel.Supply
	q.Site = &plan.Site{
		Handling: handling, Core: core, Cladding: cladding,
		Start: b.Panel.Ambient, StartAir: 1, Want: want, Cylinder: b.Gas.SupplyAir, Low: low, High: high,
	}
	return min(rating, b.Panel.Supply), mostEnergy(b, q.Setup.Pulse.Energy), nil
}

// mostEnergy returns the most that the bench may send into the fibre: what the
// file says, or twice the usual.
func mostEnergy(b *bench.Bench, usual unit.Joule) unit.Joule {
	most := b.Pulse.FullEnergy
	if most == 0 {
		most = 2 * usual
	}
	if b.Limits.Energy > 0 {
		most = min(most, b.Limits.Energy)
	}
	return max(most, usual)
}

// purgeBetween returns the pressures of a purge: down to 50 mbar where a pump
// may take it there, else to a little above ambient; up to 3 bar, or half the
// rating where that is less.
func purgeBetween(b *bench.Bench, rating unit.Pascal) (low, high unit.Pascal) {
	low = 1.1 * b.Panel.Ambient
	if b.Limits.PumpBelow > b.Panel.Ambient && b.Panel.PumpSpeed > 0 {
		low = max(50*unit.Millibar, 2*b.Panel.PumpUltimate)
	}
	return low, max(min(3*unit.Bar, rating/2), 1.2*low)
}

// parseTarget reads a wavelength or a band.
func parseTarget(text string) (s gas.Span, err error) {
	if text == "" {
		return s, usage(`plan needs --target, a wavelength such as 265nm or a band such as 240nm:280nm`)
	}
	from, to, band := strings.Cut(text, ":")
	if s.From, err = unit.ParseLength(from); err != nil {
		return s, usage("--target: %w", err)
	}
	if s.To = s.From; band {
		if s.To, err = unit.ParseLength(to); err != nil {
			return s, usage("--target: %w", err)
		}
	}
	if s.To < s.From {
		s.From, s.To = s.To, s.From
	}
	return s, nil
}

// parseRange reads FROM:TO into r; empty leaves it.
func parseRange[T ~float64](flag, text string, parse func(string) (T, error), r *plan.Range[T]) error {
	if text == "" {
		return nil
	}
	from, to, ok := strings.Cut(text, ":")
	a, err := parse(from)
	if err != nil {
		return usage("--%s: %w", flag, err)
	}
	b, err := parse(to)
	switch {
	case !ok:
		return usage("--%s %q: expected FROM:TO", flag, text)
	case err != nil:
		return usage("--%s: %w", flag, err)
	case !(a > 0 && b > a):
		return usage("--%s %q: expected above zero and rising", flag, text)
	}
	r.From, r.To = a, b
	return nil
}

// drawPlan draws the map of the best choice, or of the first gas where there is
// none: from a third of the pressure that is to be used to a little beyond the
// highest that may be.
func drawPlan(path string, p *plan.Plan) error {
	q := p.Question
	gas, pressures, energies, marks := q.Gases[0], q.Pressure, q.Energy, []figure.Mark(nil)
	if len(p.Choices) > 0 {
		c := p.Choices[0]
		gas, pressures.From = c.Gas, max(pressures.From, c.From/3)
		marks = append(marks, figure.Mark{Pressure: c.Pressure, Energy: c.Energy, Text: fmt.Sprintf("%.3g bar, %.3g uJ", c.Pressure.Bar(), c.Energy.Microjoules())})
	}
	pressures.To *= 1.1
	pressures.Steps, energies.Steps = 140, 70
	m, err := q.Survey(gas, pressures, energies)
	if err != nil {
		return fmt.Errorf("--plot: %w", err)
	}
	file, err := os.Create(path)
	if err != nil {
		return fmt.Errorf("--plot: %w", err)
	}
	err = figure.PlanMap(file, strings.TrimPrefix(filepath.Ext(path), "."), m, q.Target.From, q.Target.To, marks)
	return errors.Join(err, file.Close())
}
