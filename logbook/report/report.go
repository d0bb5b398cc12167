package report

import (
	_ "embed"
	"fmt"
	"html/template"
	"io"
	"maps"
	"math"
	"slices"
	"time"

	"barline/logbook"
	"barline/model/unit"
)

//go:embed page.html
var page string

// Options of a report.
type Options struct {
	Filter logbook.Filter // From and To bound the report; the rest narrows what is drawn
	Zone   *time.Location // of the times shown; nil is UTC
}

// Write reads the logbook in dir and writes the report as HTML to w. The
// logbook is verified first, and what was found stands in the report.
func Write(w io.Writer, dir string, o Options) error {
	if o.Zone == nil {
		o.Zone = time.UTC
	}
	verified, err := logbook.Verify(dir, false)
	if err != nil {
		return err
	}
	from, to := extent(verified, o.Filter)
	f := newFindings(from, to)
	if err := f.gather(logbook.Records(dir, o.Filter)); err != nil {
		return err
	}
	t, err := template.New("page").Funcs(template.FuncMap{
		"time": func(t time.Time) string {
			if t.IsZero() {
				return ""
			}
			return t.In(o.Zone).Format("2006-01-02 15:04:05")
		},
		"bar": func(pa float64) string { return fmt.Sprintf("%.4f", unit.Pascal(pa).Bar()) },
		"nm": func(m *float64) string {
			if m == nil {
				return ""
			}
			return fmt.Sprintf("%.2f", unit.Metre(*m).Nanometres())
		},
		"sigma":   func(m float64) string { return fmt.Sprintf("%.2f", unit.Metre(m).Nanometres()) },
		"celsius": func(k float64) string { return fmt.Sprintf("%.2f", unit.Kelvin(k).Celsius()) },
		"uJ":      func(j float64) string { return fmt.Sprintf("%.4g", unit.Joule(j).Microjoules()) },
	}).Parse(page)
	if err != nil {
		return err
	}
	return t.Execute(w, f.view(verified, o.Zone))
}

// extent returns the times that the charts run over.
func extent(r logbook.Report, f logbook.Filter) (from, to time.Time) {
	for _, s := range r.Segments {
		a, errA := time.Parse(time.RFC3339, s.From)
		b, errB := time.Parse(time.RFC3339, s.To)
		if errA != nil || errB != nil {
			continue
		}
		if from.IsZero() || a.Before(from) {
			from = a
		}
		if b.After(to) {
			to = b
		}
	}
	if !f.From.IsZero() && f.From.After(from) {
		from = f.From
	}
	if !f.To.IsZero() && f.To.Before(to) {
		to = f.To
	}
	return from, to
}

// legend names one line of a chart.
type legend struct {
	Name, Colour, Dashes string
}

// view is what page.html is filled from.
type view struct {
	Folder       string
	From, To     time.Time
	Zone         string
	Records      int
	Verified     logbook.Report
	Sound        bool
	Pressure     template.HTML
	Legend       []legend
	Map          template.HTML
	Residual     template.HTML
	Steps        []step
	StepsLeft    int
	Alarms       table
	Notes        table
	Calibration  table
	Gaps         table
	Sessions     table
	Configured   []configuration
	KindsCounted []string
}

// Time returns when the step was recorded.
func (s step) Time() time.Time { return s.time }

func (f *findings) view(verified logbook.Report, zone *time.Location) view {
	v := view{
		Folder: verified.Folder, From: f.from, To: f.to, Zone: zone.String(), Records: f.records,
		Verified: verified, Sound: verified.OnlyTorn(),
		Steps: f.steps, StepsLeft: f.stepsLeft,
		Alarms: f.alarms, Notes: f.notes, Calibration: f.calibration, Gaps: f.gaps, Sessions: f.sessions, Configured: f.texts,
	}
	for _, k := range slices.Sorted(maps.Keys(f.kinds)) {
		v.KindsCounted = append(v.KindsCounted, fmt.Sprintf("%d %s", f.kinds[k], k))
	}
	v.Pressure, v.Legend = f.drawPressure(zone)
	v.Map = f.drawMap()
	v.Residual = f.drawResidual(zone)
	return v
}

// bounds returns the least and the greatest value of all columns.
func bounds(cols []column, least, most float64) (float64, float64) {
	for _, c := range cols {
		if c.any {
			least, most = min(least, c.least), max(most, c.most)
		}
	}
	return least, most
}

func (f *findings) drawPressure(zone *time.Location) (template.HTML, []legend) {
	least, most := math.Inf(1), math.Inf(-1)
	for _, s := range f.pressures {
		least, most = bounds(s.columns[:], least, most)
	}
	if least > most {
		return "", nil
	}
	var names []legend
	c := newChart("pressure over time", timeAxis(f.from, f.to, zone), valueAxis("pressure, bar absolute", least, most, mostTicksY))
	for i, s := range f.pressures {
		c.columns(s.columns[:], strokes[i])
		names = append(names, legend{s.name, strokes[i].colour, strokes[i].dashes})
	}
	return template.HTML(c.svg()), names
}

func (f *findings) drawResidual(zone *time.Location) template.HTML {
	least, most := bounds(f.residual.columns[:], 0, 0)
	if !slices.ContainsFunc(f.residual.columns[:], func(c column) bool { return c.any }) {
		return ""
	}
	c := newChart("residual over time", timeAxis(f.from, f.to, zone), valueAxis("measured minus predicted, nm", least, most, mostTicksY))
	c.level(0)
	c.bars(f.residual.columns[:], strokes[0])
	return template.HTML(c.svg())
}

// drawMap draws emission over pressure: predicted as a band of one standard
// uncertainty to each side, measured as points.
func (f *findings) drawMap() template.HTML {
	bins := slices.Sorted(maps.Keys(f.predicted))
	x, cols := make([]float64, len(bins)), make([]column, len(bins))
	for i, b := range bins {
		x[i], cols[i] = float64(b)*binBar, f.predicted[b]
	}
	leastY, mostY := bounds(cols, math.Inf(1), math.Inf(-1))
	leastX, mostX := math.Inf(1), math.Inf(-1)
	if len(x) > 0 {
		leastX, mostX = x[0], x[len(x)-1]
	}
	for p := range f.measured {
		px, py := float64(p[0])*binBar, float64(p[1])*binNm
		leastX, mostX, leastY, mostY = min(leastX, px), max(mostX, px), min(leastY, py), max(mostY, py)
	}
	if leastX > mostX {
		return ""
	}
	c := newChart("emission over pressure", valueAxis("pressure in the core, bar absolute", leastX, mostX, mostTicksX),
		valueAxis("emission, nm (vacuum)", leastY, mostY, mostTicksY))
	c.band(x, cols, 25*binBar)
	points := slices.SortedFunc(maps.Keys(f.measured), func(a, b [2]int) int { return slices.Compare(a[:], b[:]) })
	for _, p := range points {
		c.point(float64(p[0])*binBar, float64(p[1])*binNm)
	}
	return template.HTML(c.svg())
}
