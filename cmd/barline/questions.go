package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"strconv"
	"strings"

	"github.com/mattn/go-isatty"

	"barline/device/link"
	"barline/model/bench"
)

// interview writes a bench file by questions. It opens no port.
type interview struct {
	dialogue
	draft
	ports    []link.Port
	channels int // of the whole file, for names
}

// writeBenchByQuestions asks for a bench and writes its file, and returns its
// name. A file that exists is never written over.
func writeBenchByQuestions(in io.Reader, out io.Writer, ports []link.Port) (string, error) {
	v := &interview{dialogue: dialogue{in: bufio.NewReader(in), out: out}, ports: ports}
	v.say("No bench file is named. These questions write one; nothing is sent to any instrument.")
	v.say("Enter takes what stands in brackets; Ctrl-C leaves without writing.\n")
	name := v.ask("Name of the file", "bench.toml", func(name string) string {
		if _, err := os.Lstat(name); err == nil {
			return fmt.Sprintf("%s exists and is not written over; another name, or barline watch -b %s", name, name)
		}
		return ""
	})
	v.light()
	v.gas()
	v.instruments()
	if v.err != nil {
		return "", v.err
	}
	if wrong := v.mistakes(name); len(wrong) > 0 {
		v.say("\nThe checker of bench files is not content yet:\n%v\n", wrong)
		if !v.yes("Write the file all the same, to be mended by hand?", true) {
			return "", errLeft
		}
	}
	if v.err != nil {
		return "", v.err
	}
	file, err := os.OpenFile(name, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if errors.Is(err, fs.ErrExist) {
		return "", fmt.Errorf("%s has come into being meanwhile and is not written over: nothing was written", name)
	}
	if err != nil {
		return "", fmt.Errorf("bench file: %w", err)
	}
	_, err = file.Write(v.file())
	if err := errors.Join(err, file.Close()); err != nil {
		return "", fmt.Errorf("bench file: %w", err)
	}
	v.say("\n%s is written. Next:\n", name)
	v.say("    barline check -b %s          what was understood", name)
	v.say("    barline check -b %s --live   reads every instrument once, sets nothing", name)
	v.say("    barline watch -b %s          the dashboard", name)
	return name, nil
}

// askForBench asks for a bench file on a terminal. Ctrl-C ends it although a
// read of the terminal cannot be interrupted.
func askForBench(ctx context.Context, in io.Reader, out io.Writer) error {
	ports, err := link.Ports()
	if err != nil {
		ports = nil // the name of one may be typed
	}
	done := make(chan error, 1)
	go func() {
		_, err := writeBenchByQuestions(in, out, ports)
		done <- err
	}()
	select {
	case err := <-done:
		return err
	case <-ctx.Done():
		fmt.Fprintln(out)
		return ctx.Err()
	}
}

// isTerminal reports whether a stream is one.
func isTerminal(stream any) bool {
	f, ok := stream.(*os.File)
	return ok && isatty.IsTerminal(f.Fd())
}

// key asks for one key of the last table; the checker of bench files judges
// the answer. An empty answer leaves the key out.
func (v *interview) key(key, question, preset string, write func(string) string) string {
	answer := v.ask(question, preset, func(answer string) string {
		if answer == "" {
			v.drop(key)
		} else {
			v.set(key, write(answer))
		}
		return v.wrong(key)
	})
	return answer
}

// text asks for a key that is a text or a quantity.
func (v *interview) text(key, question, preset string) string {
	return v.key(key, question, preset, quoted)
}

// light asks for bench, fibre and pulse.
func (v *interview) light() {
	v.table("[bench]", "bench")
	v.key("name", "Name of the bench", "", quoted)
	v.key("cylinder", "Gas cylinder and grade, for the record; may be empty", "", quoted)
	v.key("fibre_piece", "Piece of fibre and when it was cleaved; may be empty", "", quoted)

	v.say("\nFibre")
	v.table("[fibre]", "fibre")
	kind := v.text("kind", "Kind: capillary, kagome or antiresonant", "antiresonant")
	v.text("core_diameter", `Core diameter, such as "34 um"`, "")
	if kind != "capillary" {
		v.text("wall", `Glass wall round the core, such as "180 nm"`, "")
	}
	v.text("length", `Length, such as "30 cm"`, "")
	v.text("loss", "Attenuation as measured", "0 dB/m")

	v.say("\nGas and pulse")
	v.table("[gas]", "gas")
	v.text("species", "Gas: helium, neon, argon, krypton, xenon or nitrogen", "argon")
	v.table("[pulse]", "pulse")
	v.text("wavelength", `Pump wavelength in vacuum, such as "1030 nm"`, "")
	v.text("duration", `Duration, full width at half maximum, such as "35 fs"`, "")
	v.text("energy", `Pulse energy in the fibre, such as "1.3 uJ"`, "")
	v.text("repetition_rate", `Repetition rate, such as "100 kHz"`, "")
}

// gas asks for panel and limits. Ratings have no preset: they stand on the
// parts.
func (v *interview) gas() {
	v.say("\nGas panel")
	v.table("[panel]", "panel")
	v.text("ambient", `Air pressure in the room; "3 bar(g)" counts from it`, "1.013 bar")
	v.text("cell_volume", `Volume of each cell, such as "60 cm3"`, "")
	v.text("supply", `Pressure behind the regulator, such as "18 bar"`, "")

	v.say("\nPressure ratings, as they stand on the parts. The lowest bounds every setpoint.")
	v.table("[limits]", "limits")
	v.text("fibre_seal", `Fibre seal, such as "16 bar"`, "")
	v.text("cells", "Cells", "")
	v.text("windows", "Windows", "")
	v.text("line", "Line", "")
	v.text("rise_rate", "The pressure may rise by", "0.2 bar/s")
	v.text("fall_rate", "and fall by", "0.2 bar/s")
}

// instruments asks for instruments until there are enough.
func (v *interview) instruments() {
	v.say("\nInstruments. Ports that are plugged in:")
	for i, p := range v.ports {
		v.say("  %d  %s  %s", i+1, p.Name, p.Text)
	}
	if len(v.ports) == 0 {
		v.say("  none; the name of one may be typed all the same")
	}
	for n := 0; v.err == nil; n++ {
		question := "Where is the next instrument: a number from the list, a port, or host:port? Empty: no more"
		if n == 0 {
			question = "Where is the first instrument: a number from the list, a port, or host:port? Empty: none"
		}
		where := v.ask(question, "", func(answer string) string {
			if i, err := strconv.Atoi(answer); err == nil && (i < 1 || i > len(v.ports)) {
				return fmt.Sprintf("%d: the list ends at %d", i, len(v.ports))
			}
			return ""
		})
		if where == "" {
			return
		}
		if i, err := strconv.Atoi(where); err == nil {
			where = v.ports[i-1].Name
		}
		v.instrument(n, where)
	}
}

func (v *interview) instrument(n int, where string) {
	path := fmt.Sprintf("instrument[%d]", n)
	v.table("[[instrument]]", path)
	v.text("name", "What is it called, such as gauges", fmt.Sprintf("instrument %d", n+1))
	tcp := !strings.HasPrefix(where, "usb:") && !strings.HasPrefix(where, "/") && strings.Contains(where, ":")
	preset := bench.ModbusRTU
	if tcp {
		preset = bench.ModbusTCP
	}
	protocol := v.text("protocol", "Protocol: modbus-rtu, modbus-tcp, scpi or lines", preset)
	if tcp {
		v.set("address", quoted(where))
	} else {
		v.set("port", quoted(where))
		v.key("baud", "Baud", "9600", bare)
		v.text("parity", "Parity: none, even or odd", "none")
	}
	fields := []string{""}
	streams := false
	if protocol == bench.Lines {
		v.text("pattern", `One of its lines with the numbers as fields in braces, such as "EM {emission} nm W {width} nm"`, "")
		if streams = v.yes("Does it talk by itself?", true); streams {
			v.set("streams", "true")
		} else {
			v.text("ask", "What asks it for a line", "")
		}
		fields = fieldsOf(v.value("pattern"))
	}
	if !streams {
		v.text("every", "How often to read it", "250 ms")
	}
	if protocol == bench.SCPI {
		if hold := v.ask("Command that HOLD sends, such as SOUR:PRES:MODE HOLD; may be empty", "", nil); hold != "" {
			v.set("hold", tomlList(hold))
			v.key("resume", "and the one before the next setpoint", "", func(text string) string { return tomlList(text) })
		}
	}
	for k := 0; v.err == nil; k++ {
		field := ""
		if protocol == bench.Lines {
			if k >= len(fields) {
				return
			}
			field = fields[k]
			v.say("\nField {%s}", field)
		} else if k > 0 && !v.yes("Another channel of this instrument?", false) {
			return
		}
		v.channel(fmt.Sprintf("%s.channel[%d]", path, k), protocol, field)
	}
}

// value returns what was set under a key of the last table, without quotes.
func (v *interview) value(key string) string {
	for _, l := range v.tables[len(v.tables)-1].lines {
		if l.key == key {
			if text, err := strconv.Unquote(l.value); err == nil {
				return text
			}
			return l.value
		}
	}
	return ""
}

// fieldsOf returns the names in braces of a pattern.
func fieldsOf(pattern string) (list []string) {
	for {
		_, rest, ok := strings.Cut(pattern, "{")
		name, after, closed := strings.Cut(rest, "}")
		if !ok || !closed {
			return list
		}
		list = append(list, name)
		pattern = after
	}
}
