package main

import (
	"bufio"
	"bytes"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/creack/pty"

	"barline/device/link"
	"barline/model/bench"
	"barline/model/reading"
)

// typed are the key presses of somebody with three instruments, who makes a
// few mistakes on the way.
const typed = `north.toml
North
argon 5.0, 10 L

round
antiresonant
34
34 um
180 nm
30 cm


argon
1030 nm
35 fs
1.3 uJ
100 kHz

60 cm3
18 bar
16 bar
16
15 bar(g)
16 bar
20 bar
0.2 bar/s

1
gauges
modbus-rtu
19200
even
100 ms
cell A
cell-a-pressure
1
4
0
float32
CDAB
1 bar
no
0 bar to 20 bar
yes
fibre
fibre-temperature
3
3
16
float32
ABCD

-20 degC to 80 degC
no
7
2
controller
scpi
38400
none
250 ms
SOUR:PRES:MODE HOLD
SOUR:PRES:MODE CONT
setpoint
setpoint
SOUR:PRES:LEV?
SOUR:PRES:LEV {value}
1 bar
no
0 bar to 20 bar
no
192.168.0.9:4001
spectrometer
lines
EM {emission} nm W {width} nm
yes
emission
emission

190 nm to 400 nm
width
emission-width

0 nm to 100 nm

`

var someports = []link.Port{{Name: "/dev/serial/by-id/usb-gauges", Text: "a converter"}, {Name: "/dev/ttyUSB1"}}

func TestQuestionsWriteABench(t *testing.T) {
	t.Chdir(t.TempDir())
	var out bytes.Buffer
	name, err := writeBenchByQuestions(strings.NewReader(typed), &out, someports)
	if err != nil {
		t.Fatalf("%v\n%s", err, out.String())
	}
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	b, err := bench.Parse(text, name)
	if err != nil {
		t.Fatalf("%v\n%s\n%s", err, text, out.String())
	}
	if b.Bench.Name != "North" || b.Fibre.Kind != "antiresonant" || b.Limits.Cells.String() != "16.013 bar" || b.Limits.FibreSeal.String() != "16 bar" || len(b.Instrument) != 3 {
		t.Errorf("bench %+v, limits %+v, %d instruments", b.Bench, b.Limits, len(b.Instrument))
	}
	if in := b.Instrument[0]; in.Port != someports[0].Name || in.Baud != 19200 || in.Parity != "even" || len(in.Channel) != 2 || in.Channel[0].Order != "CDAB" || in.Channel[1].Role != reading.FibreTemperature {
		t.Errorf("gauges %+v", in)
	}
	if in := b.Instrument[1]; in.Port != someports[1].Name || len(in.Hold) != 1 || in.Channel[0].Write != "SOUR:PRES:LEV {value}" {
		t.Errorf("controller %+v", in)
	}
	if in := b.Instrument[2]; in.Address != "192.168.0.9:4001" || !in.Streams || len(in.Channel) != 2 || in.Channel[1].Field != "width" {
		t.Errorf("spectrometer %+v", in)
	}
	// Each mistake was said at once, in the checker's words.
	for _, want := range []string{`"round"`, "no unit", "the list ends at 2", "usb-gauges", "a converter", "is written"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("the dialogue does not say %q:\n%s", want, out.String())
		}
	}
	if rest := strings.Count(out.String(), "not content"); rest != 0 {
		t.Errorf("the checker was not content:\n%s", out.String())
	}
}

// Whatever is typed, a file that is there stays as it is.
func TestQuestionsWriteOverNothing(t *testing.T) {
	t.Chdir(t.TempDir())
	if err := os.WriteFile("bench.toml", []byte("mine"), 0o600); err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	_, err := writeBenchByQuestions(strings.NewReader("\nbench.toml\n"), &out, nil)
	if !errors.Is(err, errLeft) || !strings.Contains(out.String(), "is not written over") {
		t.Errorf("%v\n%s", err, out.String())
	}
	// It may also come into being while the questions are asked.
	in := &meddler{text: strings.NewReader(typed), do: func() {
		if err := os.WriteFile("north.toml", []byte("theirs"), 0o600); err != nil {
			t.Error(err)
		}
	}}
	if _, err := writeBenchByQuestions(in, &out, someports); err == nil || !strings.Contains(err.Error(), "not written over") {
		t.Errorf("a file that came into being: %v", err)
	}
	for name, want := range map[string]string{"bench.toml": "mine", "north.toml": "theirs"} {
		if text, err := os.ReadFile(filepath.Join(".", name)); err != nil || string(text) != want {
			t.Errorf("%s holds %q (%v), expected %q", name, text, err, want)
		}
	}
}

// meddler does something at its second read.
type meddler struct {
	text  *strings.Reader
	do    func()
	reads int
}

func (m *meddler) Read(p []byte) (int, error) {
	if m.reads++; m.reads == 2 {
		m.do()
	}
	return m.text.Read(p[:min(len(p), 64)])
}

// Answers that end early leave nothing behind.
func TestQuestionsLeft(t *testing.T) {
	t.Chdir(t.TempDir())
	for n := 0; n < len(typed); n += 37 {
		var out bytes.Buffer
		if _, err := writeBenchByQuestions(strings.NewReader(typed[:n]), &out, someports); !errors.Is(err, errLeft) {
			t.Errorf("after %d bytes: %v", n, err)
		}
	}
	if files, err := os.ReadDir("."); err != nil || len(files) > 0 {
		t.Errorf("left behind: %v, %v", files, err)
	}
}

func FuzzQuestions(f *testing.F) {
	f.Add(typed)
	f.Add("x.toml\n\x00\n\n\"\n")
	f.Fuzz(func(t *testing.T, text string) {
		t.Chdir(t.TempDir())
		// Only plain names: the fuzzer is not to write elsewhere.
		_, rest, _ := strings.Cut(text, "\n")
		var out bytes.Buffer
		if name, err := writeBenchByQuestions(strings.NewReader("x.toml\n"+rest), &out, someports); err == nil {
			if _, err := os.Stat(name); err != nil {
				t.Errorf("said to be written: %v", err)
			}
		}
	})
}

// On a terminal watch asks; Ctrl-C leaves and writes nothing.
func TestWatchAsksOnATerminal(t *testing.T) {
	if testing.Short() {
		t.Skip("starts a real process")
	}
	cmd := barline(t, "watch")
	cmd.Dir = t.TempDir()
	terminal, err := pty.Start(cmd)
	if err != nil {
		t.Fatal(err)
	}
	defer terminal.Close()
	text := bufio.NewReader(terminal)
	for line := ""; !strings.Contains(line, "Name of the file"); {
		b, err := text.ReadByte()
		if err != nil {
			t.Fatalf("after %q: %v", line, err)
		}
		line += string(b)
	}
	if _, err := terminal.Write([]byte{3}); err != nil { // Ctrl-C
		t.Fatal(err)
	}
	if err := cmd.Wait(); err != nil {
		t.Errorf("left with %v, expected 0", err)
	}
	if files, err := os.ReadDir(cmd.Dir); err != nil || len(files) > 0 {
		t.Errorf("left behind: %v, %v", files, err)
	}
}
