package report

import (
	"fmt"
	"iter"
	"math"
	"time"

	"barline/logbook"
	"barline/model/reading"
	"barline/model/unit"
)

// columns is how many columns of time a chart has.
const columns = 800

// mostRows bounds each table of a report.
const mostRows = 2000

// column is what a chart shows at one place: least and greatest value.
type column struct {
	least, most float64
	any         bool
}

func (c *column) add(v float64) {
	if !c.any {
		c.least, c.most, c.any = v, v, true
		return
	}
	c.least, c.most = min(c.least, v), max(c.most, v)
}

// series is one quantity over time.
type series struct {
	name    string
	columns [columns]column
}

// event is a row of a table.
type event struct {
	Time time.Time
	Seq  uint64
	What string
	More string
}

// table is a bounded list of events.
type table struct {
	Rows []event
	Left int // rows that did not fit
}

func (t *table) add(e event) {
	if len(t.Rows) == mostRows {
		t.Left++
		return
	}
	t.Rows = append(t.Rows, e)
}

// step is a row of the scan table.
type step struct {
	Program    string   `json:"program"`
	Step       int      `json:"step"`
	Label      string   `json:"label"`
	Set        float64  `json:"set_Pa"`
	Measured   float64  `json:"measured_Pa"`
	Core       float64  `json:"core_Pa"`
	Kelvin     float64  `json:"temperature_K"`
	Energy     float64  `json:"energy_J"`
	PredictedM *float64 `json:"predicted_m"`
	MeasuredM  *float64 `json:"measured_m"`
	ResidualM  *float64 `json:"residual_m"`
	SigmaM     float64  `json:"sigma_m"`
	Status     string   `json:"status"`
	time       time.Time
}

// prediction is what a report needs of a prediction record.
type prediction struct {
	Pressure  *float64 `json:"pressure_Pa"`
	Emission  *float64 `json:"emission_m"`
	Sigma     float64  `json:"sigma_m"`
	Measured  *float64 `json:"measured_m"`
	ResidualM *float64 `json:"residual_m"`
}

// findings is everything that a report shows.
type findings struct {
	from, to time.Time
	records  int
	kinds    map[string]int

	pressures []*series // bar
	residual  series    // nm
	lastKnown map[string]held

	predicted map[int]column // by bin of pressure: nm, widened by one sigma
	measured  map[[2]int]struct{}

	steps       []step
	stepsLeft   int
	alarms      table
	notes       table
	calibration table
	gaps        table // what was lost, left out, or stepped
	sessions    table
	texts       []configuration
}

// held is a value that stands until the next reading of its channel.
type held struct {
	column int
	value  float64
}

type configuration struct {
	Time   time.Time
	Seq    uint64
	Digest string
	Text   string
}

// Bins of the emission map.
const (
	binBar = 0.02
	binNm  = 0.25
)

func newFindings(from, to time.Time) *findings {
	return &findings{
		from: from, to: to,
		kinds:     map[string]int{},
		residual:  series{name: "residual"},
		lastKnown: map[string]held{},
		predicted: map[int]column{},
		measured:  map[[2]int]struct{}{},
	}
}

// gather reads records. Damage is noted among the gaps; any other error ends
// it.
func (f *findings) gather(records iter.Seq2[logbook.Record, error]) error {
	var last time.Time
	for r, err := range records {
		if err != nil {
			d := logbook.AsDamage(err)
			if d == nil {
				return err
			}
			f.gaps.add(event{Seq: d.After, What: string(d.Kind), More: d.Error()})
			continue
		}
		f.records++
		f.kinds[r.Kind]++
		last = r.UTC
		if err := f.take(r); err != nil {
			f.gaps.add(event{Time: r.UTC, Seq: r.Seq, What: "not understood", More: err.Error()})
		}
	}
	f.letStand(last)
	return nil
}

// letStand draws the last value of every channel on to t, because the record
// holds changes; then the channels are unknown.
func (f *findings) letStand(t time.Time) {
	if at, ok := f.columnAt(t); ok {
		for _, s := range f.pressures {
			if last, ok := f.lastKnown[s.name]; ok {
				s.hold(last, at+1)
			}
		}
	}
	clear(f.lastKnown)
}

// hold fills the columns behind last up to the one before end.
func (s *series) hold(last held, end int) {
	for i := last.column + 1; i < end; i++ {
		s.columns[i].add(last.value)
	}
}

// columnAt returns the column of t; ok is false outside the report.
func (f *findings) columnAt(t time.Time) (i int, ok bool) {
	span := f.to.Sub(f.from)
	if span <= 0 || t.Before(f.from) || t.After(f.to) {
		return 0, span <= 0
	}
	return min(columns-1, int(float64(t.Sub(f.from))/float64(span)*columns)), true
}

func (f *findings) take(r logbook.Record) error {
	e := event{Time: r.UTC, Seq: r.Seq}
	switch r.Kind {
	case "reading":
		return f.takeReading(r)
	case "prediction":
		return f.takePrediction(r)
	case "step":
		s := step{time: r.UTC}
		if err := r.Decode(&s); err != nil {
			return err
		}
		if len(f.steps) == mostRows {
			f.stepsLeft++
			return nil
		}
		f.steps = append(f.steps, s)
	case "alarm":
		var d struct{ Name, State, Cause string }
		if err := r.Decode(&d); err != nil {
			return err
		}
		e.What, e.More = d.Name+": "+d.State, d.Cause
		f.alarms.add(e)
	case "note":
		var d struct {
			Text, About string
			Corrects    uint64
		}
		if err := r.Decode(&d); err != nil {
			return err
		}
		if e.What = d.Text; d.About != "" {
			e.More = "about " + d.About
		}
		if d.Corrects != 0 {
			e.More += fmt.Sprintf(" corrects record %d", d.Corrects)
		}
		f.notes.add(e)
	case "calibration":
		e.What = string(r.Data)
		f.calibration.add(e)
	case "lost":
		var d struct {
			Records          int
			From, To, Reason string
		}
		if err := r.Decode(&d); err != nil {
			return err
		}
		e.What, e.More = fmt.Sprintf("%d records lost", d.Records), fmt.Sprintf("%s to %s: %s", d.From, d.To, d.Reason)
		f.gaps.add(e)
	case "clock":
		e.What, e.More = "clock", string(r.Data)
		f.gaps.add(e)
	case "start", "stop":
		if r.Kind == "stop" {
			f.letStand(r.UTC)
		}
		clear(f.lastKnown) // what came before a start ended in a crash
		e.What, e.More = r.Kind, string(r.Data)
		f.sessions.add(e)
	case "configuration":
		c := configuration{Time: r.UTC, Seq: r.Seq}
		if err := r.Decode(&c); err != nil {
			return err
		}
		if n := len(f.texts); n == 0 || f.texts[n-1].Text != c.Text {
			f.texts = append(f.texts, c)
		}
	}
	return nil
}

func (f *findings) takeReading(r logbook.Record) error {
	var d struct {
		Channel, Role, Status string
		Value                 *float64
	}
	if err := r.Decode(&d); err != nil {
		return err
	}
	role, err := reading.ParseRole(d.Role)
	if err != nil || !role.IsPressure() || role == reading.SupplyPressure || role == reading.Ambient {
		return nil
	}
	at, ok := f.columnAt(r.UTC)
	if !ok {
		return nil
	}
	s := f.pressure(d.Channel)
	if last, ok := f.lastKnown[s.name]; ok {
		s.hold(last, at)
	}
	if status, err := reading.ParseStatus(d.Status); err != nil || !status.Usable() || d.Value == nil {
		delete(f.lastKnown, s.name)
		return nil
	}
	bar := unit.Pascal(*d.Value).Bar()
	s.columns[at].add(bar)
	f.lastKnown[s.name] = held{at, bar}
	return nil
}

// pressure returns the series of a channel; more channels than a chart can
// tell apart share the last one.
func (f *findings) pressure(channel string) *series {
	for _, s := range f.pressures {
		if s.name == channel {
			return s
		}
	}
	if len(f.pressures) == len(strokes) {
		return f.pressures[len(strokes)-1]
	}
	s := &series{name: channel}
	f.pressures = append(f.pressures, s)
	return s
}

func (f *findings) takePrediction(r logbook.Record) error {
	var d prediction
	if err := r.Decode(&d); err != nil {
		return err
	}
	if d.ResidualM != nil {
		if at, ok := f.columnAt(r.UTC); ok {
			f.residual.columns[at].add(unit.Metre(*d.ResidualM).Nanometres())
		}
	}
	if d.Pressure == nil {
		return nil
	}
	bin := int(math.Round(unit.Pascal(*d.Pressure).Bar() / binBar))
	if d.Emission != nil {
		nm, sigma := unit.Metre(*d.Emission).Nanometres(), unit.Metre(d.Sigma).Nanometres()
		c := f.predicted[bin]
		c.add(nm - sigma)
		c.add(nm + sigma)
		f.predicted[bin] = c
	}
	if d.Measured != nil {
		f.measured[[2]int{bin, int(math.Round(unit.Metre(*d.Measured).Nanometres() / binNm))}] = struct{}{}
	}
	return nil
}
