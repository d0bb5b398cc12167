package main

import (
	"bufio"
	"encoding/json"
	"fmt"
	"math"
	"net"
	"strings"
	"testing"

	"barline/model/bench"
)

// serve answers each connection with reply for every line that comes, and
// returns its address.
func serve(t *testing.T, reply func(line string) string) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { l.Close() })
	go func() {
		for {
			c, err := l.Accept()
			if err != nil {
				return
			}
			go func() {
				defer c.Close()
				for in := bufio.NewScanner(c); in.Scan(); {
					if answer := reply(in.Text()); answer != "" {
						fmt.Fprintf(c, "%s\n", answer)
					}
				}
			}()
		}
	}()
	return l.Addr().String()
}

// liveBench is the sample with other instruments.
func liveBench(t *testing.T, instruments string) string {
	t.Helper()
	text := string(bench.Sample())
	from, to := strings.Index(text, "[[instrument]]"), strings.Index(text, "[emission]")
	if from < 0 || to < from {
		t.Fatal("the sample has no instruments before [emission]")
	}
	return benchFile(t, text[:from]+instruments+text[to:])
}

func TestCheckLiveReadsEveryInstrument(t *testing.T) {
	address := serve(t, func(line string) string {
		return map[string]string{"*IDN?": "maker,model,0,1", "MEAS:PRES?": "2.385", "SOUR:PRES:LEV?": "3.1"}[line]
	})
	controller := `
[[instrument]]
name = "controller"
protocol = "scpi"
address = "` + address + `"
timeout = "2 s"
[[instrument.channel]]
name = "controller"
role = "controller-pressure"
query = "MEAS:PRES?"
scale = "1 bar"
[[instrument.channel]]
name = "setpoint"
role = "setpoint"
query = "SOUR:PRES:LEV?"
scale = "1 bar"
`
	code, out, stderr := command("check", "--live", "-b", liveBench(t, controller))
	if code != exitDone {
		t.Fatalf("exit %d, %s%s", code, out, stderr)
	}
	for _, want := range []string{"controller on " + address, "2.385 bar", "3.1 bar", "good", "ms"} {
		if !strings.Contains(out, want) {
			t.Errorf("%q is not said:\n%s", want, out)
		}
	}
	dead := controller + `
[[instrument]]
name = "gauge"
protocol = "lines"
address = "127.0.0.1:1"
streams = true
pattern = "P {p}"
[[instrument.channel]]
name = "gauge"
role = "cell-a-pressure"
field = "p"
scale = "1 bar"
`
	code, out, stderr = command("check", "--live", "--json", "-b", liveBench(t, dead))
	var got struct{ Instruments []liveReport }
	if err := json.Unmarshal([]byte(out), &got); err != nil || code != exitFailed || len(got.Instruments) != 2 {
		t.Fatalf("exit %d, %v, %s%s", code, err, out, stderr)
	}
	if c := got.Instruments[0].Channels[0]; c.Value == nil || math.Abs(*c.Value-238500) > 1e-6 || c.Unit != "Pa" || c.Status != "good" || c.Seconds <= 0 {
		t.Errorf("channel %+v", c)
	}
	if r := got.Instruments[1]; r.Problem == "" {
		t.Errorf("nobody minds a dead line: %+v", r)
	}
}
