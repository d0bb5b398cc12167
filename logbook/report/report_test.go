package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"

	"barline/logbook"
	"barline/model/reading"
)

var start = time.Date(2026, 12, 1, 8, 0, 0, 0, time.UTC)

// bookForTest writes an hour: a ramp, a pause without a program, a level.
func bookForTest(t *testing.T) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "book")
	b, err := logbook.Open(dir, logbook.Options{})
	if err != nil {
		t.Fatal(err)
	}
	add := func(minute float64, kind string, data any) {
		t.Helper()
		d := time.Duration(minute * float64(time.Minute))
		if _, err := b.Append(reading.Stamp{UTC: start.Add(d), Mono: d}, kind, data); err != nil {
			t.Fatal(err)
		}
	}
	pressure := func(minute, bar float64) {
		add(minute, "reading", reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Value: bar * 1e5, Status: reading.Good})
	}
	add(0, "start", map[string]string{"version": "1"})
	add(0, "configuration", map[string]string{"digest": "d1", "text": "[bench]\nname = \"<Heron>\""})
	for i := range 21 {
		pressure(float64(i), 2+0.25*float64(i))
		m := 2e-7 + 1e-9*float64(i)
		add(float64(i), "prediction", map[string]any{"pressure_Pa": 2e5 + 25000*float64(i), "emission_m": m, "sigma_m": 1e-9,
			"measured_m": m + 5e-10, "residual_m": 5e-10})
	}
	add(20, "stop", map[string]string{})
	add(40, "start", map[string]string{"version": "1"})
	pressure(40, 7)
	add(41, "note", map[string]any{"text": "<script>alert(1)</script> & \"quotes\"", "corrects": 3})
	add(42, "alarm", map[string]any{"name": "cell A high", "state": "unacknowledged", "cause": "above 6.9 bar"})
	add(43, "step", map[string]any{"program": "scan", "step": 1, "set_Pa": 7e5, "measured_Pa": 700123.0, "core_Pa": 7e5, "temperature_K": 295.15,
		"energy_J": 1.3e-6, "predicted_m": 2.2e-7, "measured_m": nil, "residual_m": nil, "sigma_m": 1e-9, "status": "good"})
	pressure(60, math.NaN())
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	return dir
}

func render(t *testing.T, dir string, o Options) string {
	t.Helper()
	var out bytes.Buffer
	if err := Write(&out, dir, o); err != nil {
		t.Fatal(err)
	}
	return out.String()
}

func TestReportStandsAlone(t *testing.T) {
	page := render(t, bookForTest(t), Options{})
	for _, bad := range []string{"http:", "https:", "src=", "href=", "<script", "@import", "url(", "NaN", "Inf", "ZgotmplZ"} {
		if strings.Contains(page, bad) {
			t.Errorf("the page contains %q", bad)
		}
	}
	for _, want := range []string{
		"&lt;script&gt;alert(1)", "corrects record 3", "cell A high: unacknowledged", "7.0012", "22.00", "220.00",
		"name = &#34;&lt;Heron&gt;&#34;", "are as they were written", "000001.jsonl", "@media print",
	} {
		if !strings.Contains(page, want) {
			t.Errorf("no %q in the page", want)
		}
	}
	charts := 0
	for _, svg := range regexp.MustCompile(`(?s)<svg.*?</svg>`).FindAllString(page, -1) {
		d := xml.NewDecoder(strings.NewReader(svg))
		for {
			if _, err := d.Token(); errors.Is(err, io.EOF) {
				break
			} else if err != nil {
				t.Fatalf("%v in %s", err, svg)
			}
		}
		charts++
	}
	if charts != 4 { // three charts and one line of the legend
		t.Errorf("%d drawings, expected 4", charts)
	}
}

// TestPressureIsWhereItBelongs reads positions back from the drawing.
func TestPressureIsWhereItBelongs(t *testing.T) {
	dir := bookForTest(t)
	f := newFindings(start, start.Add(time.Hour))
	if err := f.gather(logbook.Records(dir, logbook.Filter{})); err != nil {
		t.Fatal(err)
	}
	cols := f.pressures[0].columns
	for minute, want := range map[float64]float64{0: 2, 5.05: 3.25, 10.5: 4.5, 19.9: 6.75, 41: 7, 55: 7} {
		c := cols[int(minute/60*columns)]
		if !c.any || c.least > want || c.most < want {
			t.Errorf("at minute %v: %+v, expected %v bar", minute, c, want)
		}
	}
	for _, minute := range []float64{20.5, 30, 39.5} {
		if c := cols[int(minute/60*columns)]; c.any {
			t.Errorf("at minute %v nothing was recorded, drawn is %+v", minute, c)
		}
	}
	x, y := timeAxis(f.from, f.to, time.UTC), valueAxis("bar", 2, 7, mostTicksY)
	c := newChart("", x, y)
	c.columns(cols[:], strokes[0])
	path := regexp.MustCompile(`stroke-dasharray="" d="M([\d.]+) ([\d.]+)`).FindStringSubmatch(c.svg())
	if path == nil {
		t.Fatal(c.svg())
	}
	px, _ := strconv.ParseFloat(path[1], 64)
	py, _ := strconv.ParseFloat(path[2], 64)
	// First column; 2 bar is 0.2 of 5.4 bar above the lower edge.
	if math.Abs(px-(left+plotWidth/columns/2)) > 0.1 || math.Abs(py-(top+plotHeight*(1-0.2/5.4))) > 0.1 {
		t.Errorf("the line begins at %v, %v", px, py)
	}
}

func TestTicksAreRound(t *testing.T) {
	for _, c := range []struct {
		least, most float64
		want        string
	}{
		{0, 10, "0 2 4 6 8 10"},
		{6.997, 7.0025, "6.997 6.998 6.999 7.000 7.001 7.002"},
		{-0.3, 0.3, "-0.2 0.0 0.2"},
		{7, 7, "6.95 7.00 7.05"},
	} {
		var got []string
		for _, tk := range valueAxis("", c.least, c.most, 6).ticks {
			got = append(got, tk.text)
		}
		if strings.Join(got, " ") != c.want {
			t.Errorf("%v to %v: %q, expected %q", c.least, c.most, got, c.want)
		}
	}
	zone := time.FixedZone("bench", 3600)
	for _, c := range []struct {
		span time.Duration
		want string
	}{
		{90 * time.Second, "09:00:00 09:00:10 09:00:20"},
		{8 * time.Hour, "09:00 10:00 11:00"},
		{7 * 24 * time.Hour, "2 Dec 3 Dec 4 Dec"},
		{700 * 24 * time.Hour, ""},
	} {
		a := timeAxis(start, start.Add(c.span), zone)
		var got []string
		for _, tk := range a.ticks {
			got = append(got, tk.text)
		}
		if !strings.HasPrefix(strings.Join(got, " "), c.want) || len(got) > mostTicksX+1 || len(got) < 2 {
			t.Errorf("%v: %q, expected %q first", c.span, got, c.want)
		}
	}
}

func TestReportOfDamage(t *testing.T) {
	f := newFindings(start, start.Add(time.Hour))
	damage := &logbook.Damage{Segment: "000001.jsonl", After: 7, Kind: logbook.Edited, Text: "record 8"}
	if err := f.gather(func(yield func(logbook.Record, error) bool) { yield(logbook.Record{}, damage) }); err != nil {
		t.Fatal(err)
	}
	if len(f.gaps.Rows) != 1 || !strings.Contains(f.gaps.Rows[0].More, "record 8") {
		t.Errorf("%+v", f.gaps)
	}
	broken := fmt.Errorf("disk")
	if err := f.gather(func(yield func(logbook.Record, error) bool) { yield(logbook.Record{}, broken) }); err != broken {
		t.Error(err)
	}
}
