package main

import (
	"context"
	"fmt"
	"io"
	"strings"
	"time"

	"barline/cmd/barline/loop"
	"barline/model/live"
	"barline/model/reading"
)

// plain prints an experiment as lines, one every few seconds of bench time and
// one for each change of mode, for a pipe or a terminal that is none.
func plain(w io.Writer, every time.Duration) front {
	return func(ctx context.Context, l *loop.Loop) error {
		var last time.Duration = -every
		var mode live.Mode
		var notice string
		for {
			select {
			case <-ctx.Done():
				return nil
			case <-l.Changed():
			}
			s := l.Snapshot()
			if s.Mode != mode || s.Notice != notice {
				mode, notice = s.Mode, s.Notice
				line := fmt.Sprintf("%s  %s", s.Now.UTC.Format(time.TimeOnly), s.Mode)
				for _, more := range []string{s.Why, s.Notice} {
					if more != "" {
						line += ": " + more
					}
				}
				if _, err := fmt.Fprintln(w, line); err != nil {
					return err
				}
			}
			if s.Now.Mono-last >= every {
				last = s.Now.Mono
				if _, err := fmt.Fprintln(w, statusLine(s)); err != nil {
					return err
				}
			}
		}
	}
}

// statusLine is the bench in one line.
func statusLine(s *live.Snapshot) string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s  %-8s", s.Now.UTC.Format(time.TimeOnly), s.Mode)
	value := func(label string, role reading.Role, scale, offset float64, digits int, unit string) {
		r := s.Latest[role]
		if r.Channel == "" {
			return
		}
		if !r.Status.Usable() {
			fmt.Fprintf(&b, "  %s %s", label, r.Status)
			return
		}
		fmt.Fprintf(&b, "  %s %.*f %s", label, digits, r.Value*scale+offset, unit)
	}
	value("cell A", reading.CellAPressure, 1e-5, 0, 3, "bar")
	value("cell B", reading.CellBPressure, 1e-5, 0, 3, "bar")
	value("fibre", reading.FibreTemperature, 1, -273.15, 2, "degC")
	if s.CoreKnown && s.CoreAir >= 20e-6 { // more than is in pure gas
		fmt.Fprintf(&b, "  air %s", live.AirText(s.CoreAir))
	}
	if p := &s.Prediction; p.Valid && p.Emission != 0 {
		fmt.Fprintf(&b, "  predicted %.2f nm ± %.1f nm (%s)", p.Emission.Nanometres(), p.Sigma.Nanometres(), p.Answer)
	} else if p.Why != "" {
		fmt.Fprintf(&b, "  predicted none: %s", p.Why)
	}
	value("measured", reading.Emission, 1e9, 0, 2, "nm")
	if s.ResidualKnown {
		fmt.Fprintf(&b, "  residual %+.2f nm", s.Residual.Nanometres())
	}
	if !s.Record.Writing {
		fmt.Fprintf(&b, "  NOT RECORDING: %s", s.Record.Reason)
	}
	return b.String()
}
