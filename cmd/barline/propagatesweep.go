package main

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/csv"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"runtime"
	"sync"
	"text/tabwriter"

	"barline/model/emission"
)

// step is one row of a sweep: the object that --json prints, or why there is
// none.
type step struct {
	input  emission.Input
	object json.RawMessage
	refuse string // the refusal of physics; the sweep goes on behind it
}

// runSweep runs the steps on all cores and prints them in order.
func (f *propagateFlags) runSweep(ctx context.Context, out *bufio.Writer, stderr io.Writer, p *propagation, in emission.Input, s *sweep) error {
	inputs := s.inputs(in)
	kept, err := openKept(f.resume)
	if err != nil {
		return err
	}
	defer kept.close()
	rows, err := f.rows(out, s.name)
	if err != nil {
		return err
	}
	bar := newBar(stderr)
	defer bar.clear()
	err = p.steps(ctx, inputs, kept, func(done int) {
		bar.draw(float64(done)/float64(len(inputs)), fmt.Sprintf(", step %d of %d", done, len(inputs)))
	}, func(st step) error {
		bar.clear()
		return errors.Join(rows.print(st), out.Flush())
	})
	return errors.Join(err, rows.end())
}

// steps carries out the inputs on all cores. It calls print with the steps in
// order, from one goroutine, as soon as they are known, and said with how many
// are done. All its goroutines have ended when it returns.
func (p *propagation) steps(ctx context.Context, inputs []emission.Input, kept *kept, said func(int), print func(step) error) error {
	ctx, stop := context.WithCancel(ctx)
	defer stop()
	results := make([]chan step, len(inputs))
	for i := range results {
		results[i] = make(chan step, 1)
	}
	var mu sync.Mutex
	next, done := 0, 0
	var failed error
	var all sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), len(inputs)) {
		own := p.clone()
		all.Go(func() {
			for {
				mu.Lock()
				i := next
				next++
				mu.Unlock()
				if i >= len(inputs) || ctx.Err() != nil {
					return
				}
				st, err := own.step(ctx, inputs[i], kept)
				mu.Lock()
				done++
				said(done)
				if err != nil && failed == nil {
					failed = err
					stop()
				}
				mu.Unlock()
				results[i] <- st
			}
		})
	}
	err := func() error {
		for _, r := range results {
			select {
			case st := <-r:
				if err := errors.Join(ctx.Err(), print(st)); err != nil {
					return err
				}
			case <-ctx.Done():
				return ctx.Err()
			}
		}
		return nil
	}()
	stop()
	all.Wait()
	if failed != nil {
		return failed
	}
	return err
}

// step runs one input, unless it was kept.
func (p *propagation) step(ctx context.Context, in emission.Input, kept *kept) (step, error) {
	key := p.key(in)
	if object, ok := kept.find(key); ok {
		return step{input: in, object: object}, nil
	}
	d, err := p.run(ctx, in, 0, nil)
	if err != nil {
		if ctx.Err() != nil {
			return step{}, ctx.Err()
		}
		return step{input: in, refuse: err.Error()}, nil
	}
	object, err := json.Marshal(d.object())
	if err != nil {
		return step{}, err
	}
	return step{input: in, object: object}, kept.add(key, object)
}

// key names what a step depends on.
func (p *propagation) key(in emission.Input) string {
	text := fmt.Sprintf("%+v %+v %+v %v %g %+v %s", p.setup.Gas, p.setup.Fibre, p.setup.Pulse, p.setup.Plasma, p.tolerance, in, p.text)
	sum := sha256.Sum256([]byte(text))
	return hex.EncodeToString(sum[:8])
}

// kept is the file of --resume: JSON Lines of key and object. Without a file
// it keeps nothing. Lines that are not whole are skipped.
type kept struct {
	mu   sync.Mutex
	have map[string]json.RawMessage
	file *os.File
}

type keptLine struct {
	Key  string          `json:"key"`
	Step json.RawMessage `json:"step"`
}

func openKept(path string) (*kept, error) {
	k := &kept{have: make(map[string]json.RawMessage)}
	if path == "" {
		return k, nil
	}
	text, err := os.ReadFile(path)
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, fmt.Errorf("--resume: %w", err)
	}
	for _, l := range bytes.Split(text, []byte("\n")) {
		var line keptLine
		if json.Unmarshal(l, &line) == nil && line.Key != "" {
			k.have[line.Key] = line.Step
		}
	}
	if k.file, err = os.OpenFile(path, os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o644); err != nil {
		return nil, fmt.Errorf("--resume: %w", err)
	}
	return k, nil
}

func (k *kept) find(key string) (json.RawMessage, bool) {
	k.mu.Lock()
	defer k.mu.Unlock()
	object, ok := k.have[key]
	return object, ok
}

// add appends a step by one write; the line feed in front ends a torn line.
func (k *kept) add(key string, object json.RawMessage) error {
	if k.file == nil {
		return nil
	}
	line, err := json.Marshal(keptLine{key, object})
	if err != nil {
		return err
	}
	k.mu.Lock()
	defer k.mu.Unlock()
	if _, err = k.file.Write(append(append([]byte{'\n'}, line...), '\n')); err != nil {
		return fmt.Errorf("--resume: %w", err)
	}
	return nil
}

func (k *kept) close() {
	if k.file != nil {
		k.file.Close() // every line was written and checked by itself
	}
}

// stepRows prints steps one by one.
type stepRows struct {
	print func(step) error
	end   func() error
}

// sweptRow is what a printed row takes from an object.
type sweptRow struct {
	Emission    *float64 `json:"emission_nm"`
	Peak        *float64 `json:"emission_peak_nm"`
	Width       *float64 `json:"emission_width_nm"`
	Conversion  *float64 `json:"conversion_percent"`
	EnergyOut   float64  `json:"energy_out_uJ"`
	Compression float64  `json:"compression_m"`
	Ionised     float64  `json:"ionised_fraction"`
	Reliable    bool     `json:"reliable"`
	Reasons     []string `json:"reasons"`
}

// rows returns the printer that the flags ask for, its header printed.
func (f *propagateFlags) rows(out *bufio.Writer, name string) (stepRows, error) {
	none := func() error { return nil }
	if f.json {
		return stepRows{func(s step) error {
			if s.refuse != "" {
				return json.NewEncoder(out).Encode(refusedObject{number(s.input.Pressure.Bar()), number(s.input.Temperature), number(s.input.Energy.Microjoules()), s.refuse})
			}
			_, err := out.Write(append(append([]byte(nil), s.object...), '\n'))
			return err
		}, none}, nil
	}
	if f.csv {
		w := csv.NewWriter(out)
		header := []string{"pressure_bar", "temperature_K", "energy_uJ", "air_ppm", "emission_nm", "emission_peak_nm", "emission_width_nm",
			"conversion_percent", "energy_out_uJ", "compression_m", "ionised_fraction", "reliable", "reasons"}
		return stepRows{func(s step) error {
			row := []string{digits(s.input.Pressure.Bar(), 6), digits(float64(s.input.Temperature), 6), digits(s.input.Energy.Microjoules(), 5), digits(float64(s.input.Air)*1e6, 4)}
			if s.refuse != "" {
				row = append(row, "", "", "", "", "", "", "", "false", s.refuse)
			} else {
				r, err := readRow(s.object)
				if err != nil {
					return err
				}
				row = append(row, orBlank(r.Emission, 6), orBlank(r.Peak, 6), orBlank(r.Width, 4), orBlank(r.Conversion, 4),
					digits(r.EnergyOut, 5), digits(r.Compression, 4), digits(r.Ionised, 3), fmt.Sprint(r.Reliable), join(r.Reasons))
			}
			err := w.Write(row)
			w.Flush()
			return errors.Join(err, w.Error())
		}, none}, w.Write(header)
	}
	const columns = "%s\t%s\t%s\t%s\t%s\t%s\t%s\t %s\n"
	w := tabwriter.NewWriter(out, 13, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(w, columns, name, "emission", "peak", "width", "conversion", "compression", "ionised", "")
	return stepRows{func(s step) error {
		at := sweptText(name, s.input)
		if s.refuse != "" {
			fmt.Fprintf(w, columns, at, "-", "-", "-", "-", "-", "-", s.refuse)
			return w.Flush()
		}
		r, err := readRow(s.object)
		if err != nil {
			return err
		}
		fmt.Fprintf(w, columns, at, orDash(r.Emission, "%.1f nm"), orDash(r.Peak, "%.1f nm"), orDash(r.Width, "%.1f nm"), orDash(r.Conversion, "%.2f %%"),
			fmt.Sprintf("%.1f mm", 1e3*r.Compression), fmt.Sprintf("%.2g %%", 100*r.Ionised), join(r.Reasons))
		return w.Flush()
	}, none}, nil
}

// refusedObject is the line of a step that physics refused.
type refusedObject struct {
	Pressure    number `json:"pressure_bar"`
	Temperature number `json:"temperature_K"`
	Energy      number `json:"energy_in_uJ"`
	Refused     string `json:"refused"`
}

func readRow(object json.RawMessage) (r sweptRow, err error) {
	if err := json.Unmarshal(object, &r); err != nil {
		return r, fmt.Errorf("a kept step is no object: %w", err)
	}
	return r, nil
}

func orBlank(v *float64, n int) string {
	if v == nil {
		return ""
	}
	return digits(*v, n)
}

func orDash(v *float64, format string) string {
	if v == nil {
		return "-"
	}
	return fmt.Sprintf(format, *v)
}

func join(reasons []string) string {
	text := ""
	for i, r := range reasons {
		if i > 0 {
			text += "; "
		}
		text += r
	}
	return text
}
