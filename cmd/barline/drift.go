package main

import (
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"
	"time"

	"github.com/spf13/cobra"

	"barline/cmd/barline/fullfield"
	"barline/logbook"
	"barline/model/bench"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
)

// driftFlags are the flags of drift.
type driftFlags struct {
	good, over string
	allan      string
	step       bool
	asJSON     bool
}

func newDrift() *cobra.Command {
	var f driftFlags
	cmd := &cobra.Command{
		Use:   "drift DIR",
		Short: "Whether the light of a logbook has moved, and why",
		Long: `Lays the newest half hour at rest in a logbook over the last good stretch:
what moved, what would explain it and how probably, and what to do next to tell.
The good stretch is what the program learnt as quiet last, up to where it saw a
drift; --good and --over name others, such as yesterday's. Both must be at about
one pressure.

    barline drift DIR
    barline drift DIR --good 2026-11-30T09:00:00Z/2026-11-30T17:00:00Z
    barline drift DIR --step > step.toml && barline run step.toml -b bench.toml
    barline drift DIR --allan emission`,
		Args: oneArg("the folder of a logbook"),
		RunE: func(cmd *cobra.Command, args []string) error { return f.run(args[0], cmd.OutOrStdout()) },
	}
	flags := cmd.Flags()
	flags.StringVar(&f.good, "good", "", "the good stretch, FROM/TO in RFC 3339")
	flags.StringVar(&f.over, "over", "", "the stretch that is judged, FROM/TO in RFC 3339")
	flags.StringVar(&f.allan, "allan", "", "print the Allan deviation of emission, residual or pressure over the judged stretch instead; default there: all")
	flags.BoolVar(&f.step, "step", false, "print only the step that would tell best, as a procedure for barline run")
	flags.BoolVar(&f.asJSON, "json", false, "print the result as one JSON object")
	cmd.MarkFlagsMutuallyExclusive("allan", "step")
	return cmd
}

// stretch is a stretch of wall time; the zero one is everything.
type stretch struct{ from, to time.Time }

func parseStretch(flag, text string) (s stretch, err error) {
	if text == "" {
		return s, nil
	}
	from, to, ok := strings.Cut(text, "/")
	if s.from, err = time.Parse(time.RFC3339, from); err == nil {
		s.to, err = time.Parse(time.RFC3339, to)
	}
	if !ok || err != nil || !s.to.After(s.from) {
		return s, usage("%s %q: expected two times such as 2026-12-01T09:00:00Z/2026-12-01T17:00:00Z", flag, text)
	}
	return s, nil
}

func (s stretch) holds(t time.Time) bool {
	return (s.from.IsZero() || !t.Before(s.from)) && (s.to.IsZero() || t.Before(s.to))
}

// resting is the means of a logbook and what else a verdict needs.
type resting struct {
	at       []time.Time
	means    []drift.Means
	data     []live.MeansData
	verdicts []live.DriftData
	when     []time.Time // of the verdicts
	text     string      // of the bench file in force last
}

// readResting reads the means and verdicts of a logbook.
func readResting(folder string) (*resting, error) {
	if err := isLogbook(folder); err != nil {
		return nil, err
	}
	r := new(resting)
	kinds := []string{string(live.KindMeans), string(live.KindDrift), string(live.KindConfiguration)}
	for rec, err := range logbook.Records(folder, logbook.Filter{Kinds: kinds}) {
		if err != nil {
			if logbook.AsDamage(err) == nil {
				return nil, err
			}
			continue // log verify names the damage; whole records count
		}
		switch live.Kind(rec.Kind) {
		case live.KindMeans:
			var d live.MeansData
			if rec.Decode(&d) != nil || len(r.at) > 0 && !rec.UTC.After(r.at[len(r.at)-1]) {
				continue
			}
			start := rec.UTC
			if len(r.at) > 0 {
				start = r.at[0]
			}
			r.at, r.data = append(r.at, rec.UTC), append(r.data, d)
			r.means = append(r.means, d.Means(rec.UTC.Sub(start)))
		case live.KindDrift:
			var d live.DriftData
			if rec.Decode(&d) == nil {
				r.verdicts, r.when = append(r.verdicts, d), append(r.when, rec.UTC)
			}
		case live.KindConfiguration:
			var c configurationData
			if rec.Decode(&c) == nil && c.Text != "" {
				r.text = c.Text
			}
		}
	}
	if len(r.means) == 0 {
		return nil, fmt.Errorf("%s holds no means of a bench at rest: it was written before drift was watched, or nothing stood still for ten seconds", folder)
	}
	return r, nil
}

// halfHour is what is judged where nobody says otherwise.
const halfHour = 30 * time.Minute

// newest is the stretch that is judged where nobody says otherwise.
func (r *resting) newest() stretch {
	last := r.at[len(r.at)-1]
	return stretch{last.Add(-halfHour), last.Add(time.Second)}
}

// lastGood is the stretch from where a quiet stretch was learnt last, ten
// minutes before it was, to the drift that came after it, and at the latest to
// where the judged stretch begins.
func (r *resting) lastGood(before time.Time) (s stretch, ok bool) {
	for i, d := range r.verdicts {
		if r.when[i].After(before) {
			break
		}
		switch {
		case d.Verdict == drift.Learnt.String():
			s, ok = stretch{r.when[i].Add(-10 * time.Minute), time.Time{}}, true
		case ok && s.to.IsZero() && d.Since != nil: // it may have stood since before
			if s.to = *d.Since; !s.to.After(s.from) {
				s.to = s.from.Add(10 * time.Minute)
			}
		}
	}
	if ok && (s.to.IsZero() || s.to.After(before)) {
		s.to = before
	}
	return s, ok && s.to.After(s.from)
}

// samples returns the values of an observable in a stretch, near a pressure.
func (r *resting) samples(s stretch, o drift.Observable, near unit.Pascal) (list []drift.Sample) {
	const within = 0.1 * unit.Bar
	for i, x := range r.means {
		if s.holds(r.at[i]) && x.Count[o] > 0 && math.Abs(float64(x.Pressure-near)) <= float64(within) {
			list = append(list, drift.Sample{At: x.At, Value: x.Value[o]})
		}
	}
	return list
}

// middle returns where the bench stood most of a stretch: the middle pressure.
func (r *resting) middle(s stretch) (p unit.Pascal, n int) {
	var list []float64
	for i, x := range r.means {
		if s.holds(r.at[i]) {
			list = append(list, float64(x.Pressure))
		}
	}
	if len(list) == 0 {
		return 0, 0
	}
	return unit.Pascal(median(list)), len(list)
}

// movedEntry is one observable of the comparison.
type movedEntry struct {
	Quantity string `json:"quantity"`
	Unit     string `json:"unit"`
	Good     number `json:"good"`
	Now      number `json:"now"`
	Moved    number `json:"moved"` // relative where the unit of the shift is 1
	Sigma    number `json:"sigma"`
	Relative bool   `json:"relative"`
}

// comparison is what drift says.
type comparison struct {
	GoodFrom  time.Time           `json:"good_from"`
	GoodTo    time.Time           `json:"good_to"`
	GoodMeans int                 `json:"good_means"`
	From      time.Time           `json:"from"`
	To        time.Time           `json:"to"`
	Means     int                 `json:"means"`
	Pressure  number              `json:"pressure_bar"`
	Moved     []movedEntry        `json:"moved"`
	Matters   bool                `json:"matters"` // by what the bench file says
	Findings  []live.FindingData  `json:"findings,omitempty"`
	Alike     map[string][]string `json:"alike,omitempty"`
	Rough     bool                `json:"slopes_rough,omitempty"`
	Steps     []live.StepOffer    `json:"steps,omitempty"`
}

func (f *driftFlags) run(folder string, w io.Writer) error {
	good, err := parseStretch("--good", f.good)
	if err != nil {
		return err
	}
	over, err := parseStretch("--over", f.over)
	if err != nil {
		return err
	}
	r, err := readResting(folder)
	if err != nil {
		return err
	}
	if f.allan != "" {
		return r.allan(f.allan, over, w, f.asJSON)
	}
	if f.step {
		return r.step(w)
	}
	if over == (stretch{}) {
		over = r.newest()
	}
	if good == (stretch{}) {
		var ok bool
		if good, ok = r.lastGood(over.from); !ok {
			return fmt.Errorf("%s holds no quiet stretch yet: it takes ten minutes at one pressure; --good names one", folder)
		}
	}
	b, err := bench.Parse([]byte(r.text), "configuration in the record")
	if err != nil {
		return fmt.Errorf("the bench file in the logbook cannot be read any more: %w", err)
	}
	c, err := r.compare(b, good, over)
	if err != nil {
		return err
	}
	if f.asJSON {
		return writeObject(w, c)
	}
	return c.write(w)
}

// compare lays two stretches over each other and weighs what explains it.
func (r *resting) compare(b *bench.Bench, good, over stretch) (*comparison, error) {
	now, n := r.middle(over)
	if n == 0 {
		return nil, fmt.Errorf("nothing was at rest from %s to %s", over.from.Format(time.RFC3339), over.to.Format(time.RFC3339))
	}
	c := &comparison{GoodFrom: good.from, GoodTo: good.to, From: over.from, To: over.to, Means: n, Pressure: number(now.Bar())}
	var o drift.Observation
	matters := live.WatchOf(b).Matters
	for k := range drift.Decay {
		was, err := drift.MeanOf(r.samples(good, k, now))
		is, errNow := drift.MeanOf(r.samples(over, k, now))
		if err != nil || errNow != nil {
			continue
		}
		c.GoodMeans = max(c.GoodMeans, was.Values)
		scale, relative := 1.0, k == drift.Strength || k == drift.Width || k == drift.Metered
		if relative {
			scale = math.Abs(was.Mean)
		}
		if scale == 0 {
			continue
		}
		o.Shift[k] = (is.Mean - was.Mean) / scale
		o.Sigma[k] = math.Hypot(is.MeanSigma, was.MeanSigma) / scale
		c.Moved = append(c.Moved, movedEntry{k.String(), live.UnitOf(k), number(was.Mean), number(is.Mean), number(o.Shift[k]), number(o.Sigma[k]), relative})
		c.Matters = c.Matters || matters[k] > 0 && math.Abs(o.Shift[k]) >= matters[k] && math.Abs(o.Shift[k]) > 3*o.Sigma[k]
	}
	if len(c.Moved) == 0 {
		return nil, fmt.Errorf("the good stretch, %s to %s, has nothing at rest near %v: compare at one pressure", good.from.Format(time.RFC3339), good.to.Format(time.RFC3339), now)
	}
	return c, c.weigh(b, r, over, now, o)
}

// weigh attributes what moved, with the slopes of the prediction there.
func (c *comparison) weigh(b *bench.Bench, r *resting, over stretch, now unit.Pascal, o drift.Observation) error {
	s, err := newSession(b, []byte(r.text))
	if err != nil {
		return err
	}
	g := &guided{estimate: s.predictor, anchored: cachedNodes(s.predictor)}
	in := emission.Input{Pressure: now, Temperature: 295.15, Energy: b.Pulse.Energy}
	state := drift.State{Pressure: now}
	for i := range r.means {
		if d := r.data[i]; over.holds(r.at[i]) {
			in.Temperature, in.Energy = unit.Kelvin(d.TemperatureK), unit.Joule(d.EnergyJ)
			state.TwoGauges, state.EnergyMetered, state.TemperatureMetered = d.Disagreement != nil, d.Metered != nil, d.Warmth != nil
		}
	}
	p := g.Predict(in, nil)
	if !p.Valid || p.Emission == 0 {
		return nil // without a prediction there is nothing to explain it by
	}
	slopes, rough := g.Slopes(p)
	least := float64(b.Drift.Wavelength)
	for k, turn := range map[drift.Observable]float64{drift.Warmth: slopes.Temperature, drift.Metered: slopes.Energy} {
		// What the prediction takes into account matters by what it does to the light.
		c.Matters = c.Matters || least > 0 && math.Abs(o.Shift[k]*turn) >= least && math.Abs(o.Shift[k]) > 3*o.Sigma[k]
	}
	if !c.Matters {
		return nil
	}
	seen := live.Softened(o, slopes, rough)
	findings, err := drift.Attribute(drift.Causes(slopes, state), seen)
	if err != nil {
		return err
	}
	c.Rough, c.Alike = rough, drift.Alike(findings, seen, live.AlikeWithin)
	for _, f := range findings {
		c.Findings = append(c.Findings, live.FindingOf(f))
	}
	return nil
}

// cachedNodes returns the anchored predictor on what the cache holds; nil
// where that is too little. It computes nothing.
func cachedNodes(p *emission.Predictor) *emission.Predictor {
	b, err := p.Setup().AnchorBench()
	if err != nil {
		return nil
	}
	folder, err := cacheFolder()
	if err != nil {
		return nil
	}
	store, err := fullfield.OpenStore(folder, b.Spec().Digest())
	if err != nil {
		return nil
	}
	nodes, _, err := store.Load()
	if err != nil {
		return nil
	}
	q, err := p.Anchored(b.Build(nodes))
	if err != nil {
		return nil
	}
	return q
}

// step prints the step that the newest verdict offered as a procedure.
func (r *resting) step(w io.Writer) error {
	if n := len(r.verdicts); n == 0 || r.verdicts[n-1].Since == nil {
		return errors.New("no drift stands in this logbook: there is nothing to tell apart")
	}
	byHand := ""
	for _, n := range r.verdicts[len(r.verdicts)-1].Steps {
		if n.Procedure != "" {
			_, err := io.WriteString(w, n.Procedure)
			return err
		}
		byHand = n.Name
	}
	if byHand != "" {
		return fmt.Errorf("what would tell is done by hand: %s", byHand)
	}
	return errors.New("the newest verdict offers no step")
}

// write says what moved in words.
func (c *comparison) write(w io.Writer) error {
	stamp := func(t time.Time) string { return t.UTC().Format("2006-01-02 15:04") }
	fmt.Fprintf(w, "good  %s to %s UTC, %s near %.3f bar\n", stamp(c.GoodFrom), stamp(c.GoodTo), counted(c.GoodMeans, "mean"), float64(c.Pressure))
	fmt.Fprintf(w, "now   %s to %s UTC, %s\n\n", stamp(c.From), stamp(c.To), counted(c.Means, "mean"))
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(table, "\tgood\tnow\tmoved\t")
	for _, m := range c.Moved {
		scale, in := 1e9, "nm"
		switch m.Quantity {
		case drift.Strength.String():
			scale, in = 100, "%"
		case drift.Disagreement.String():
			scale, in = 1e-2, "mbar"
		case drift.Metered.String():
			scale, in = 1e6, "uJ"
		case drift.Warmth.String():
			scale, in = 1, "K"
		}
		moved := fmt.Sprintf("%+.3f ± %.3f %s", scale*float64(m.Moved), scale*float64(m.Sigma), in)
		if m.Relative {
			moved = fmt.Sprintf("%+.2f ± %.2f %% of itself", 100*float64(m.Moved), 100*float64(m.Sigma))
		}
		fmt.Fprintf(table, "%s\t%.3f %s\t%.3f %s\t%s\t\n", m.Quantity, scale*float64(m.Good), in, scale*float64(m.Now), in, moved)
	}
	if err := table.Flush(); err != nil {
		return err
	}
	fmt.Fprintln(w)
	if !c.Matters {
		fmt.Fprintln(w, "Nothing moved by as much as [drift] of the bench file calls for.")
		return nil
	}
	if len(c.Findings) == 0 {
		fmt.Fprintln(w, "Without a prediction at this pressure no cause can be named.")
		return nil
	}
	for i, f := range c.Findings {
		if i > 0 && f.Probability < 0.01 {
			break
		}
		text := f.Cause
		if f.Text != "" {
			text += ", " + f.Text
		}
		fmt.Fprintf(w, "%3.0f %%  %s\n", 100*f.Probability, text)
	}
	if same := c.Alike[c.Findings[0].Cause]; len(same) > 0 {
		fmt.Fprintf(w, "%s cannot be told from %s from here\n", c.Findings[0].Cause, strings.Join(same, ", "))
	}
	if c.Rough {
		fmt.Fprintln(w, "slopes are rough until full-field runs of this bench stand in the cache")
	}
	return nil
}
