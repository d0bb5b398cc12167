package main

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
)

// points reads the points of a scan and the bench they belong to.
func (f *fitFlags) points(folder string) (p fitPoints, err error) {
	if f.bench != "" {
		if _, p.bench, err = readBench(f.bench); err != nil {
			return p, err
		}
	}
	if f.csv != "" {
		if p.bench == nil {
			return p, usage("fit --csv needs the bench that the points were taken on: -b bench.toml")
		}
		file, err := os.Open(f.csv)
		if err != nil {
			return p, usage("points: %w", err)
		}
		defer file.Close()
		p.about = filepath.Base(f.csv)
		p.list, err = readPoints(file, p.about, p.bench)
		return p, err
	}
	return p, p.fromLogbook(folder, f.scan)
}

// leastSpread is what is believed of the scatter of a step at least: a mean of
// many readings is no better than the spectrometer's pixels.
const leastSpread = 0.02 * unit.Nanometre

// fromLogbook takes the steps of a scan, counted from 1, 0 being the last. A
// scan ends where the number of the step does not rise.
func (p *fitPoints) fromLogbook(folder string, scan int) error {
	if err := isLogbook(folder); err != nil {
		return err
	}
	var scans [][]calibration.Point
	var text string // of the bench file that was in force at the newest scan wanted
	last, program := 0, ""
	kinds := []string{string(live.KindStep), string(live.KindConfiguration)}
	inForce := ""
	for r, err := range logbook.Records(folder, logbook.Filter{Kinds: kinds}) {
		if err != nil {
			if logbook.AsDamage(err) == nil {
				return err
			}
			continue // log verify names the damage; whole records count
		}
		if r.Kind == string(live.KindConfiguration) {
			var c configurationData
			if r.Decode(&c) == nil && c.Text != "" {
				inForce = c.Text
			}
			last = 0
			continue
		}
		var s live.StepData
		if err := r.Decode(&s); err != nil {
			continue
		}
		if s.Step <= last || s.Program != program || last == 0 {
			scans = append(scans, nil)
		}
		last, program = s.Step, s.Program
		if scan == 0 || len(scans) == scan {
			text = inForce
		}
		scans[len(scans)-1] = append(scans[len(scans)-1], rowPoint(s, r.UTC))
	}
	if len(scans) == 0 {
		return fmt.Errorf("%s holds no scan", folder)
	}
	if scan == 0 {
		scan = len(scans)
	}
	if scan < 1 || scan > len(scans) {
		return usage("--scan %d: %s holds %s, counted from 1", scan, folder, counted(len(scans), "scan"))
	}
	p.list, p.about = scans[scan-1], fmt.Sprintf("scan %d of %s", scan, filepath.Base(folder))
	if p.bench != nil {
		return nil
	}
	if text == "" {
		return usage("%s holds no bench file for this scan: give one with -b", folder)
	}
	b, err := bench.Parse([]byte(text), filepath.Base(folder)+" (bench file in the logbook)")
	if err != nil {
		return fmt.Errorf("the bench file in the logbook cannot be read any more: %w; give one with -b", err)
	}
	p.bench = b
	return nil
}

// rowPoint is the point that a row of a scan makes.
func rowPoint(row live.StepData, at time.Time) calibration.Point {
	point := calibration.Point{At: at, Input: emission.Input{
		Pressure: unit.Pascal(row.CorePa), Temperature: unit.Kelvin(row.TemperatureK), Energy: unit.Joule(row.EnergyJ)}}
	if status, err := reading.ParseStatus(row.Status); err == nil && row.MeasuredM != nil {
		point.Status, point.Value = status, unit.Metre(*row.MeasuredM)
	}
	point.Sigma = unit.Metre(math.Max(row.ScatterM/math.Sqrt(math.Max(float64(row.Samples), 1)), float64(leastSpread)))
	return point
}

// readPoints reads a table with the heading pressure_bar, emission_nm and
// optionally temperature_degC, energy_uJ, sigma_nm. Lines that begin with #
// are remarks.
func readPoints(r io.Reader, name string, b *bench.Bench) ([]calibration.Point, error) {
	table := csv.NewReader(r)
	table.Comment, table.TrimLeadingSpace = '#', true
	head, err := table.Read()
	if err != nil {
		return nil, usage("%s: expected a heading: %w", name, err)
	}
	at := map[string]int{}
	for i, h := range head {
		h = strings.TrimSpace(strings.TrimPrefix(h, "\ufeff"))
		switch h {
		case "pressure_bar", "emission_nm", "temperature_degC", "energy_uJ", "sigma_nm":
			at[h] = i
		default:
			return nil, usage("%s: column %q: expected pressure_bar, emission_nm, temperature_degC, energy_uJ or sigma_nm", name, h)
		}
	}
	for _, need := range []string{"pressure_bar", "emission_nm"} {
		if _, ok := at[need]; !ok {
			return nil, usage("%s: the column %s is missing", name, need)
		}
	}
	var points []calibration.Point
	for {
		row, err := table.Read()
		if errors.Is(err, io.EOF) {
			return points, nil
		}
		if err != nil {
			return nil, usage("%s: %w", name, err)
		}
		line, _ := table.FieldPos(0)
		value := func(column string, otherwise float64) float64 {
			i, given := at[column]
			if !given || strings.TrimSpace(row[i]) == "" {
				return otherwise
			}
			v, e := strconv.ParseFloat(strings.TrimSpace(row[i]), 64)
			if (e != nil || math.IsNaN(v) || math.IsInf(v, 0)) && err == nil {
				err = usage("%s:%d: %s = %q: expected a number", name, line, column, row[i])
			}
			return v
		}
		p := calibration.Point{
			Input: emission.Input{
				Pressure:    unit.Pascal(value("pressure_bar", 0)) * unit.Bar,
				Temperature: unit.Celsius(value("temperature_degC", 20)),
				Energy:      unit.Joule(value("energy_uJ", b.Pulse.Energy.Microjoules())) * unit.Microjoule,
			},
			Value:  unit.Metre(value("emission_nm", 0)) * unit.Nanometre,
			Sigma:  unit.Metre(value("sigma_nm", 0)) * unit.Nanometre,
			Status: reading.Good,
		}
		if err != nil {
			return nil, err
		}
		points = append(points, p)
	}
}
