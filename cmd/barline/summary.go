package main

import (
	"encoding/json"
	"fmt"
	"io"

	"barline/model/live"
	"barline/model/reading"
)

// summary is what a run without a screen leaves on stdout. Keys carry their
// unit; what is not known is null.
type summary struct {
	Bench          string    `json:"bench"`
	BenchTimeS     float64   `json:"bench_time_s"`
	Mode           string    `json:"mode"`
	Why            string    `json:"why,omitempty"`
	CellAPa        *float64  `json:"cell_a_Pa"`
	CellBPa        *float64  `json:"cell_b_Pa"`
	CorePa         *float64  `json:"core_Pa"`
	SetpointPa     float64   `json:"setpoint_Pa"`
	ZeroDispersion []float64 `json:"zero_dispersion_nm"`
	PredictedNm    *float64  `json:"predicted_nm"`
	Answer         string    `json:"answer"`
	MeasuredNm     *float64  `json:"measured_nm"`
	ResidualNm     *float64  `json:"residual_nm"`
	Records        uint64    `json:"records"`
	Lost           uint64    `json:"lost"`
	Dropped        uint64    `json:"dropped_readings"`
	Logbook        string    `json:"logbook"`
}

func summarise(s *live.Snapshot) summary {
	value := func(role reading.Role, scale float64) *float64 {
		if r := s.Latest[role]; r.Status.Usable() {
			v := r.Value * scale
			return &v
		}
		return nil
	}
	out := summary{
		Bench: s.Bench.Bench.Name, BenchTimeS: s.Now.Mono.Seconds(), Mode: s.Mode.String(), Why: s.Why,
		CellAPa: value(reading.CellAPressure, 1), CellBPa: value(reading.CellBPressure, 1),
		SetpointPa: float64(s.Setpoint), Answer: s.Prediction.Answer.String(),
		MeasuredNm: value(reading.Emission, 1e9),
		Records:    s.Record.Written, Lost: s.Record.Lost, Dropped: s.Dropped, Logbook: s.Folder,
		ZeroDispersion: []float64{},
	}
	if s.CoreKnown {
		p := float64(s.Core)
		out.CorePa = &p
	}
	for _, z := range s.Prediction.ZeroDispersion[:s.Prediction.ZeroDispersionCount] {
		out.ZeroDispersion = append(out.ZeroDispersion, z.Nanometres())
	}
	if s.Prediction.Emission != 0 {
		nm := s.Prediction.Emission.Nanometres()
		out.PredictedNm = &nm
	}
	if s.ResidualKnown {
		nm := s.Residual.Nanometres()
		out.ResidualNm = &nm
	}
	return out
}

func (s summary) write(w io.Writer, asJSON bool) error {
	if asJSON {
		enc := json.NewEncoder(w)
		enc.SetIndent("", "  ")
		return enc.Encode(s)
	}
	line := func(label string, v *float64, scale float64, format string) {
		text := "not known"
		if v != nil {
			text = fmt.Sprintf(format, *v*scale)
		}
		fmt.Fprintf(w, "%-16s %s\n", label, text)
	}
	fmt.Fprintf(w, "%-16s %s, %.1f s of bench time, ended in %s", "bench", s.Bench, s.BenchTimeS, s.Mode)
	if s.Why != "" {
		fmt.Fprintf(w, " (%s)", s.Why)
	}
	fmt.Fprintln(w)
	line("cell A", s.CellAPa, 1e-5, "%.3f bar")
	line("cell B", s.CellBPa, 1e-5, "%.3f bar")
	line("core", s.CorePa, 1e-5, "%.3f bar")
	for _, z := range s.ZeroDispersion {
		fmt.Fprintf(w, "%-16s %.2f nm\n", "zero dispersion", z)
	}
	line("predicted", s.PredictedNm, 1, "%.2f nm ("+s.Answer+")")
	line("measured", s.MeasuredNm, 1, "%.2f nm")
	line("residual", s.ResidualNm, 1, "%+.2f nm")
	fmt.Fprintf(w, "%-16s %d records in %s", "logbook", s.Records, s.Logbook)
	if s.Lost > 0 || s.Dropped > 0 {
		fmt.Fprintf(w, ", %d records lost, %d readings dropped", s.Lost, s.Dropped)
	}
	_, err := fmt.Fprintln(w)
	return err
}
