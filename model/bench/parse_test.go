package bench

import (
	"errors"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"barline/model/form"
	"barline/model/reading"
	"barline/model/unit"
)

func TestSampleIsRead(t *testing.T) {
	b, err := Parse(Sample(), "heron.toml")
	if err != nil {
		t.Fatal(err)
	}
	if b.Bench.Name != "Heron" || b.Fibre.CoreDiameter != 34e-6 || b.Fibre.Wall != 180e-9 || b.Pulse.Energy != 1.3e-6 {
		t.Errorf("read %+v %+v %+v", b.Bench, b.Fibre, b.Pulse)
	}
	if low := b.Limits.Enforced().Lowest(); low.Max != 16*unit.Bar {
		t.Errorf("lowest rating is %v of %s, want 16 bar", low.Max, low.Part)
	}
	if err := b.Limits.Enforced().Check(); err != nil {
		t.Error(err)
	}
	if b.Limits.Stale.Duration() != 2*time.Second || b.Logbook.DeadbandTemperature != 0.1 {
		t.Errorf("stale %v, deadband %v", b.Limits.Stale, b.Logbook.DeadbandTemperature)
	}
	g := b.Instrument[0]
	if g.DataBits != 8 || g.StopBits != 1 || g.Parity != "even" || g.Timeout != 0.5 || g.Every != 0.1 {
		t.Errorf("line of the gauges: %+v", g)
	}
	for name, want := range map[string]struct{ number, si, low, high float64 }{
		"cell A":   {2.385, 238500, -2000, 20e5},
		"fibre":    {22.5, 295.65, 253.15, 353.15},
		"emission": {265, 265e-9, 190e-9, 400e-9},
		"strength": {2.5, 0.025, 0, 1},
	} {
		ch := channelNamed(t, b, name)
		if got := ch.SI(want.number); !near(got, want.si) || !near(ch.Low, want.low) || !near(ch.High, want.high) {
			t.Errorf("%s: %v on the wire is %v %s in %v to %v, want %v in %v to %v", name, want.number, got, ch.Symbol, ch.Low, ch.High, want.si, want.low, want.high)
		}
		if back := ch.Number(ch.SI(want.number)); !near(back, want.number) {
			t.Errorf("%s: %v came back as %v", name, want.number, back)
		}
	}
}

func near(a, b float64) bool { return a-b <= 1e-12*max(a, b, 1e-9) && b-a <= 1e-12*max(a, b, 1e-9) }

func channelNamed(t *testing.T, b *Bench, name string) *Channel {
	t.Helper()
	for i := range b.Instrument {
		for j := range b.Instrument[i].Channel {
			if ch := &b.Instrument[i].Channel[j]; ch.Name == name {
				return ch
			}
		}
	}
	t.Fatalf("no channel %q", name)
	return nil
}

// edit returns the sample with each old text, which must stand there, made new.
func edit(t *testing.T, pairs ...string) string {
	t.Helper()
	text := string(Sample())
	for i := 0; i < len(pairs); i += 2 {
		if !strings.Contains(text, pairs[i]) {
			t.Fatalf("the sample does not hold %q", pairs[i])
		}
		text = strings.Replace(text, pairs[i], pairs[i+1], 1)
	}
	return text
}

// lineAt returns what stands at a mistake's place.
func lineAt(text string, m Mistake) string {
	lines := strings.Split(text, "\n")
	if m.Line < 1 || m.Line > len(lines) {
		return ""
	}
	r := []rune(lines[m.Line-1])
	if m.Column < 1 || m.Column > len(r)+1 {
		return ""
	}
	return string(r[m.Column-1:])
}

func TestEveryMistakeIsNamedWhereItStands(t *testing.T) {
	for _, c := range []struct {
		old, new string
		at       string // what stands at the place of the message
		want     string // the message
	}{
		{"length = \"30 cm\"", "lenght = \"30 cm\"", "lenght", `fibre.lenght is not a key of [fibre]; did you mean "length"?`},
		{"length = \"30 cm\"", "", "fibre]", `fibre.length is missing; expected a length such as "34 um"`},
		{"stale = \"2 s\"", "ascii = true", "ascii", `limits.ascii is not a key of [limits]; ascii belongs to [screen]`},
		{"[emission]", "[emision]", "emision]", `emision is not a section of a bench file; did you mean "emission"?`},
		{"cells = \"16 bar\"", "cells = \"16\"", `"16"`, `limits.cells = "16": it has no unit; expected a pressure such as "16 bar" (bar, mbar, ubar, Pa, hPa, kPa, MPa, atm, psi, Torr)`},
		{"cells = \"16 bar\"", "cells = 16", `16`, `limits.cells = 16: it has no unit; expected a pressure such as "16 bar" (bar, mbar, ubar, Pa, hPa, kPa, MPa, atm, psi, Torr)`},
		{"cells = \"16 bar\"", "cells = [\"16 bar\"]", `["16`, `limits.cells: expected one value, not a list`},
		{"cells = \"16 bar\"", "cells = \"0 bar\"", `"0 bar"`, `limits.cells = "0 bar": expected more than 0 bar`},
		{"rise_rate = \"0.2 bar/s\"", "rise_rate = \"0.2 bar\"", `"0.2 bar"`, `limits.rise_rate = "0.2 bar": unit "bar" is not one of a rate of pressure (bar/s, mbar/s, Pa/s, kPa/s, bar/min, mbar/min, Pa/min, kPa/min)`},
		{"rise_rate = \"0.2 bar/s\"", "", "limits]", `limits.rise_rate is missing; expected a rate of pressure such as "0.1 bar/s"`},
		{"species = \"argon\"", "species = \"argn\"", `"argn"`, `gas.species = "argn": expected helium, neon, argon, krypton, xenon or nitrogen; did you mean "argon"?`},
		{"species = \"argon\"", "species = 18", `18`, `gas.species = 18: expected text in quotes`},
		{"species = \"argon\"", "species = argon", `argon`, `a value cannot start with 'a'; text stands in quotes`},
		{"n2 = \"lehmeier-1985\"", "n2 = \"9.11e-24\"", `"9.11e-24"`, `gas.n2 = "9.11e-24": it has no unit; expected a nonlinear index such as "9.11e-24 m2/W" (m2/W, cm2/W)`},
		{"index = \"peck-fisher-1964\"", "index = \"peck-fischer-1964\"", `"peck-fischer`, ``},
		{"n2 = \"lehmeier-1985\"", "n2 = \"lehmeier\"", `"lehmeier"`, ``},
		{"n2 = \"lehmeier-1985\"", "n2 = \"9.11e-24 m2/W\"", "", ""},
		{"kind = \"antiresonant\"", "kind = \"capillary\"", `"180 nm"`, `fibre.wall = "180 nm": a capillary has no thin wall round its core; leave it out`},
		{"# cladding_holes = 6 ", "cladding_holes = 6 ", "fibre]", `fibre.cladding_hole_diameter is missing; cladding_holes is given: the diameter of one hole, such as "12 um"`},
		{"# cladding_hole_diameter", "cladding_hole_diameter", "fibre]", `fibre.cladding_holes is missing; cladding_hole_diameter is given: how many holes there are`},
		{"pump_speed = \"0.1 L/s\"", "pump_speed = \"0.1\"", `"0.1"`, `panel.pump_speed = "0.1": it has no unit; expected a pump speed such as "0.1 m3/h" (m3/h, L/s, L/min, m3/s)`},
		{"inlet = \"0.0085 dm3/(s bar)\"", "inlet = \"0 dm3/(s bar)\"", `"0 dm3/(s bar)"`, `panel.inlet = "0 dm3/(s bar)": expected more than 0 dm3/(s bar)`},
		{"wall = \"180 nm\"", "", `fibre]`, `fibre.wall is missing; a fibre of kind "antiresonant" needs the thickness of the glass round its core, such as "180 nm"`},
		{"supply = \"18 bar\"", "supply = \"21 bar\"", `"21 bar"`, `panel.supply = "21 bar": it is above limits.line, 20 bar: a valve left open would break the line`},
		{"pump_below = \"1.2 bar\"", "pump_below = \"17 bar\"", `"17 bar"`, `limits.pump_below = "17 bar": it is above the rating of fibre seal, 16 bar`},
		{"duration = \"35 fs\"", "duration = \"-35 fs\"", `"-35 fs"`, `pulse.duration = "-35 fs": expected more than 0 fs`},
		{"protocol = \"modbus-rtu\"", "protocol = \"modbus\"", `"modbus"`, `instrument.protocol = "modbus": expected modbus-rtu, modbus-tcp, scpi or lines`},
		{"port = \"/dev/serial/by-id/usb-gauges\"\nbaud = 19200\nparity = \"even\"", "", "instrument]]", `instrument "gauges" does not say how it is reached; expected port, address or command`},
		{"baud = 38400", "address = \"10.0.0.7:5025\"", "address", `instrument.address is one way too many: port is given as well; expected one of port, address and command`},
		{"port = \"/dev/serial/by-id/usb-controller\"\nbaud = 38400", "address = \"10.0.0.7\"", `"10.0.0.7"`, `instrument.address = "10.0.0.7": expected a host and a port such as "192.168.0.7:502"`},
		{"port = \"/dev/serial/by-id/usb-controller\"", "address = \"10.0.0.7:5025\"", `baud`, `instrument.baud means something on a serial port only, and port is not given`},
		{"parity = \"even\"", "parity = \"evn\"", `"evn"`, `instrument.parity = "evn": expected none, even or odd; did you mean "even"?`},
		{"baud = 19200", "baud = \"19200\"", `"19200"`, `instrument.baud = "19200": expected a whole number without quotes`},
		{"baud = 19200", "baud = 19200.0", `19200.0`, `instrument.baud = 19200.0: expected a whole number without quotes`},
		{"every = \"100 ms\"", "every = \"100 ms\"\nstreams = true", `streams`, `instrument.streams is for lines, and this instrument speaks modbus-rtu`},
		{"name = \"controller\"\nprotocol", "name = \"gauges\"\nprotocol", `"gauges"`, `instrument.name = "gauges": instrument 1 of the file has this name already`},
		{"name = \"cell B\"", "name = \"cell A\"", `"cell A"`, `instrument.channel.name = "cell A": instrument "gauges" has a channel of this name already`},
		{"role = \"cell-b-pressure\"", "role = \"cell-a-pressure\"", `"cell-a`, `instrument.channel.role = "cell-a-pressure": channel "cell A" has this role already`},
		{"unit = 2", "unit = 300", `300`, `instrument.channel.unit = 300: expected 247 or less`},
		{"function = 3", "function = 5", `5`, `instrument.channel.function = 5: expected 4 or less`},
		{"register = 16", "", `channel]]`, `instrument.channel.register is missing; expected the register's number, counted from 0`},
		{"format = \"float32\"", "format = \"float\"", `"float"`, `instrument.channel.format = "float": expected uint16, int16, uint32, int32 or float32; did you mean "float32"?`},
		{"order = \"CDAB\"", "order = \"swapped\"", `"swapped"`, `instrument.channel.order = "swapped": expected ABCD, CDAB, BADC or DCBA`},
		{"scale = \"1 bar\"", "", `channel]]`, `instrument.channel.scale is missing; it says what the number grows by from 0 to 1: expected a pressure such as "9 bar"`},
		{"scale = \"1 bar\"", "scale = \"1 degC\"", `"1 degC"`, `instrument.channel.scale = "1 degC": unit "degC" is not one of a pressure (bar, mbar, ubar, Pa, hPa, kPa, MPa, atm, psi, Torr)`},
		{"scale = \"1 bar\"", "scale = \"0 bar\"", `"0 bar"`, `instrument.channel.scale = "0 bar": expected another quantity than zero`},
		{"scale = \"1 bar\"", "scale = \"1 bar(g)\"", `"1 bar(g)"`, `instrument.channel.scale = "1 bar(g)": it is a gauge pressure; write gauge = true beside it`},
		{"range = [\"0 bar\", \"20 bar\"]", "range = [\"20 bar\", \"0 bar\"]", `["20`, `instrument.channel.range: 20 bar is not below 0 bar; expected the lowest value first`},
		{"range = [\"0 bar\", \"20 bar\"]", "range = [\"0 bar\", \"20 nm\"]", `"20 nm"`, `instrument.channel.range = "20 nm": unit "nm" is not one of a pressure (bar, mbar, ubar, Pa, hPa, kPa, MPa, atm, psi, Torr)`},
		{"range = [\"0 bar\", \"20 bar\"]", "range = \"20 bar\"", `"20 bar"`, `instrument.channel.range = "20 bar": expected a list of texts such as ["first", "second"]`},
		{"range = [\"-20 degC\", \"80 degC\"]", "gauge = true", `gauge`, `instrument.channel.gauge is for pressures, and this channel has the role fibre-temperature`},
		{"write = \"SOUR:PRES:LEV {value}\"", "write = \"SOUR:PRES:LEV\"", `"SOUR`, `instrument.channel.write = "SOUR:PRES:LEV": expected {value} in it once, where the number goes, such as "SOUR:PRES:LEV {value}"`},
		{"query = \"MEAS:PRES?\"", "write = \"P {value}\"", `write`, `instrument.channel.write is for channels that are set, and nothing is ever sent to one with the role controller-pressure`},
		{"query = \"MEAS:PRES?\"", "", `channel]]`, `instrument.channel.query is missing; expected the query that reads the channel, such as "MEAS:PRES?"`},
		{"field = \"width\"", "field = \"widht\"", `"widht"`, `instrument.channel.field = "widht": the pattern has no such field; expected emission, width, strength or counts; did you mean "width"?`},
		{"W {width} nm", "{width} nm W", "", ""},
		{"EM {emission} nm", "EM {emission}", "", ""},
		{"{emission} nm W {width}", "{emission}{width}", `"EM`, `instrument.pattern = "EM {emission}{width} nm S {strength} % P {counts...}": nothing stands between {emission} and the next field`},
		{"{strength} %", "{_...} %", `"EM`, `instrument.pattern = "EM {emission} nm W {width} nm S {_...} % P {counts...}": field {_...}: expected a name of letters, digits, - and _`},
		{"{strength} %", "{strength %", `"EM`, `instrument.pattern = "EM {emission} nm W {width} nm S {strength % P {counts...}": field {strength % P {counts...}: expected a name of letters, digits, - and _`},
		{"{counts...}", "{counts...", `"EM`, `instrument.pattern = "EM {emission} nm W {width} nm S {strength} % P {counts...": {counts... has no }`},
		{"on_alarm = []", "on_alarm = \"ring\"", `"ring"`, `alarms.on_alarm = "ring": expected a list of texts such as ["first", "second"]`},
		{"ascii = false", "ascii = \"no\"", `"no"`, `screen.ascii = "no": expected true or false, without quotes`},
		{"ascii = false", "ascii = false\nascii = true", `ascii`, ``},
		{"name = \"Heron\"", "name = \" \"", `" "`, `bench.name = " ": it is empty`},
	} {
		text := edit(t, c.old, c.new)
		_, err := Parse([]byte(text), "heron.toml")
		if c.want == "" && c.at == "" {
			if err != nil {
				t.Errorf("%s -> %s: %v", c.old, c.new, err)
			}
			continue
		}
		var found Mistakes
		if !errors.As(err, &found) {
			t.Errorf("%s -> %s: error %v, want %s", c.old, c.new, err, c.want)
			continue
		}
		if !slices.ContainsFunc(found, func(m Mistake) bool {
			return (c.want == "" || m.Text == c.want) && strings.HasPrefix(lineAt(text, m), c.at)
		}) {
			t.Errorf("%s -> %s:\n got %v\n  at %q\nwant %s\n  at %q", c.old, c.new, err, lineAt(text, found[0]), c.want, c.at)
		}
	}
}

func TestAllMistakesAreFoundAtOnce(t *testing.T) {
	text := edit(t, "length = \"30 cm\"", "lenght = \"30 cm\"", "baud = 19200", "baud = \"fast\"", "cells = \"16 bar\"", "cells = \"16\"",
		"name = \"cell B\"", "name = \"cell A\"", "[emission]", "[emision]")
	_, err := Parse([]byte(text), "heron.toml")
	var found Mistakes
	if !errors.As(err, &found) {
		t.Fatal(err)
	}
	if len(found) != 5 {
		t.Errorf("%d mistakes, want 5:\n%v", len(found), err)
	}
	for i, m := range found {
		if m.File != "heron.toml" || m.Line == 0 || m.Column == 0 {
			t.Errorf("no place: %#v", m)
		}
		if i > 0 && found[i-1].Line > m.Line {
			t.Errorf("line %d comes after line %d", m.Line, found[i-1].Line)
		}
	}
	if line, _, _ := strings.Cut(err.Error(), "\n"); !strings.HasPrefix(line, "heron.toml:14:1: fibre.lenght is not a key") {
		t.Errorf("first line is %q", line)
	}
	for _, goName := range []string{"unit.", "bench.Bench", "float64", "string", "struct", "int "} {
		if strings.Contains(err.Error(), goName) {
			t.Errorf("the message speaks of %q:\n%v", goName, err)
		}
	}
}

func TestMissingSectionsAreOneMistakeEach(t *testing.T) {
	_, err := Parse([]byte("[bench]\nname = \"empty\"\n"), "b.toml")
	want := `b.toml: [fibre] is missing; it needs kind, core_diameter and length
b.toml: [gas] is missing; it needs species
b.toml: [limits] is missing; it needs fibre_seal, cells, windows, line, rise_rate and fall_rate
b.toml: [panel] is missing; it needs cell_volume and supply
b.toml: [pulse] is missing; it needs wavelength, duration, energy and repetition_rate`
	if err == nil || err.Error() != want {
		t.Errorf("got\n%v\nwant\n%s", err, want)
	}
}

func TestGaugePressuresCountFromAmbient(t *testing.T) {
	b, err := Parse([]byte(edit(t, "cells = \"16 bar\"", "cells = \"15 bar(g)\"", "scale = \"1 bar\"\nrange = [\"-20 mbar\", \"20 bar\"]", "scale = \"1 bar(g)\"\ngauge = true\nrange = [\"-1 bar(g)\", \"20 bar\"]")), "b.toml")
	if err != nil {
		t.Fatal(err)
	}
	if !near(float64(b.Limits.Cells), 16.013e5) {
		t.Errorf("15 bar(g) at 1.013 bar is %v absolute", b.Limits.Cells)
	}
	if ch := channelNamed(t, b, "cell B"); !ch.Gauge || ch.Factor != 1e5 || ch.Low != -1e5 || ch.High != 20e5 {
		t.Errorf("gauge channel is %+v", ch)
	}
	_, err = Parse([]byte(edit(t, "cells = \"16 bar\"", "cells = \"15 bar(g)\"", "ambient = \"1.013 bar\"", "")), "b.toml")
	if err == nil || !strings.Contains(err.Error(), `limits.cells = "15 bar(g)": it is a gauge pressure; give panel.ambient`) {
		t.Errorf("gauge without ambient: %v", err)
	}
	_, err = Parse([]byte(edit(t, "follow = \"2 bar\"", "follow = \"2 bar(g)\"")), "b.toml")
	if err == nil || !strings.Contains(err.Error(), "expected an absolute one") {
		t.Errorf("a difference written as gauge: %v", err)
	}
}

func TestTheSameBenchHoweverItIsWritten(t *testing.T) {
	sections := `[fibre]
kind = "capillary"
core_diameter = "30 um"
length = "10 cm"
[[instrument]]
name = "g"
protocol = "lines"
command = ["reader"]
pattern = "P {p}"
[[instrument.channel]]
name = "a"
field = "p"
scale = "1 V"
range = ["0 V", "10 V"]
`
	inline := `fibre = { kind = "capillary", core_diameter = "30 um", length = "10 cm" }
instrument = [ { name = "g", protocol = "lines", command = ["reader"], pattern = "P {p}", channel = [ { name = "a", field = "p", scale = "1 V", range = ["0 V", "10 V"] } ] } ]
`
	rest := `
[bench]
name = "b"
[gas]
species = "neon"
[pulse]
wavelength = "800 nm"
duration = "30 fs"
energy = "1 uJ"
repetition_rate = "1 kHz"
[panel]
cell_volume = "1 L"
supply = "5 bar"
[limits]
fibre_seal = "6 bar"
cells = "6 bar"
windows = "6 bar"
line = "6 bar"
rise_rate = "0.1 bar/s"
fall_rate = "0.1 bar/s"
`
	one, err1 := Parse([]byte(sections+rest), "one.toml")
	two, err2 := Parse([]byte(inline+rest), "two.toml")
	if err1 != nil || err2 != nil {
		t.Fatal(err1, err2)
	}
	if !reflect.DeepEqual(one, two) {
		t.Errorf("read differently:\n%+v\n%+v", one, two)
	}
	if ch := one.Instrument[0].Channel[0]; ch.Symbol != "V" || ch.Role != reading.NoRole || ch.High != 10 {
		t.Errorf("channel without a role is %+v", ch)
	}
	if one.Limits.Disagreement != 0.15*unit.Bar || one.Limits.PumpBelow != 0 || one.Panel.Ambient != unit.Atmosphere || one.Screen.TimeZone != "local" {
		t.Errorf("defaults are %+v, %+v", one.Limits, one.Panel)
	}
}

func TestTagsCanBeRead(t *testing.T) {
	if err := form.CheckTags(new(Bench)); err != nil {
		t.Error(err)
	}
}

func FuzzParse(f *testing.F) {
	f.Add(Sample())
	f.Add([]byte("[[instrument]]\n[[instrument.channel]]\nrange=[[]]\n"))
	f.Add([]byte("a.b.c = {d = [1, {e = 2}]}\n[a.b]\nx=1979-05-27\n"))
	f.Add([]byte("[instrument]\nname=1\n[[instrument.channel]]\n"))
	f.Add([]byte("[panel]\nambient=\"1 bar\"\n[limits]\ncells=\"1 bar(g)\"\npump_below=\"nan bar(g)\"\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		b, err := Parse(data, "f")
		if (b == nil) == (err == nil) {
			t.Fatalf("bench %v with error %v", b, err)
		}
		var found Mistakes
		if err != nil && (!errors.As(err, &found) || len(found) == 0) {
			t.Fatalf("error of type %T: %v", err, err)
		}
		for _, m := range found {
			if m.Text == "" || m.Line < 0 || m.Line > strings.Count(string(data), "\n")+1 {
				t.Fatalf("mistake without text or beyond the file: %#v", m)
			}
		}
		if b != nil {
			if err := b.Limits.Enforced().Check(); err != nil {
				t.Fatalf("accepted limits are wrong: %v", err)
			}
		}
	})
}
