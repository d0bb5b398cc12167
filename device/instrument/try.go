package instrument

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"strings"
	"time"
	"unicode"

	"barline/device/link"
	"barline/device/modbus"
	"barline/device/scpi"
	"barline/model/bench"
	"barline/model/reading"
)

// Finding is what answered on a port that was tried.
type Finding struct {
	Line     string // such as "port /dev/ttyUSB0, 19200 baud 8E1"
	Protocol string // as the bench file spells it
	Baud     int
	Parity   string
	Answer   string // what came, for a person
}

// Settings that are tried, commonest first; those of Modbus are the defaults
// of its standard, the others are common practice without a source.
var trySettings = []struct {
	baud   int
	parity string
}{{19200, "even"}, {9600, "none"}, {115200, "none"}, {38400, "none"}}

const (
	tryListen = 300 * time.Millisecond // for one that talks by itself
	tryAnswer = 250 * time.Millisecond // for an answer to the question for a name
	tryUnit   = 60 * time.Millisecond  // for a Modbus unit
	tryUnits  = 8                      // units 1 to this are asked
)

// Try finds out what answers on a serial port. It listens, asks for a name
// (*IDN?) and reads one Modbus register of the first units; it never writes a
// value. ErrNothing says that nothing answered with any of the settings.
func Try(ctx context.Context, port string) (Finding, error) {
	for _, s := range trySettings {
		spec := bench.Instrument{Name: port, Port: port, Baud: s.baud, Parity: s.parity, Protocol: bench.ModbusRTU}
		opener, err := link.NewOpener(spec)
		if err != nil {
			return Finding{}, err
		}
		line, err := opener.Open(ctx)
		if err != nil {
			return Finding{}, err
		}
		protocol, answer, err := tryLine(ctx, line)
		if err := errors.Join(err, line.Close()); err != nil {
			return Finding{}, err
		}
		if answer != "" {
			return Finding{opener.String(), protocol, s.baud, s.parity, answer}, nil
		}
	}
	return Finding{}, fmt.Errorf("port %s: %w", port, ErrNothing)
}

// ErrNothing is wrapped by Try where nothing answered.
var ErrNothing = errors.New("nothing answered")

func tryLine(ctx context.Context, line link.Line) (protocol, answer string, err error) {
	var text liner
	for _, question := range []string{"", "*IDN?\n"} {
		if err := ctx.Err(); err != nil {
			return "", "", err
		}
		wait := tryListen
		if question != "" {
			wait = tryAnswer
			if _, err := line.Write([]byte(question)); err != nil {
				return "", "", err
			}
		}
		for deadline := time.Now().Add(wait); ; {
			heard, err := text.await(line, deadline)
			if errors.Is(err, os.ErrDeadlineExceeded) || errors.Is(err, errTalks) {
				break
			}
			if err != nil {
				return "", "", err
			}
			said := string(heard)
			if !readable(heard) || said == strings.TrimSpace(question) { // noise, or our own words
				continue
			}
			if id, err := scpi.ParseIdentity(said); err == nil && question != "" {
				return bench.SCPI, fmt.Sprintf("%s %s, serial number %s, firmware %s", id.Maker, id.Model, id.Serial, id.Firmware), nil
			}
			if question == "" {
				return bench.Lines, fmt.Sprintf("talks by itself: %q", clip(heard)), nil
			}
			return bench.Lines, fmt.Sprintf("answers %q to *IDN?", clip(heard)), nil
		}
	}
	return tryModbus(ctx, line)
}

func tryModbus(ctx context.Context, line link.Line) (protocol, answer string, err error) {
	wire := &rtuWire{timeout: tryUnit, counts: &counters{}}
	now := func() reading.Stamp { return reading.Stamp{} }
	var units []string
	for u := range byte(tryUnits) {
		if err := ctx.Err(); err != nil {
			return "", "", err
		}
		for _, f := range []modbus.Function{modbus.ReadInput, modbus.ReadHolding} {
			_, _, err := wire.exchange(line, now, modbus.Request{Unit: u + 1, Function: f, Count: 1})
			if errors.Is(err, errLost) {
				return "", "", err
			}
			if err == nil || isException(err) { // a refusal is an answer as well
				units = append(units, fmt.Sprint(u+1))
				break
			}
		}
	}
	if len(units) == 0 {
		return "", "", nil
	}
	noun := "unit"
	if len(units) > 1 {
		noun = "units"
	}
	return bench.ModbusRTU, noun + " " + strings.Join(units, ", "), nil
}

// readable tells text from what a wrong baud rate makes of it.
func readable(p []byte) bool {
	return len(p) >= 3 && !bytes.ContainsFunc(p, func(r rune) bool { return r == unicode.ReplacementChar || !unicode.IsPrint(r) && r != '\t' })
}
