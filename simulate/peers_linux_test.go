package simulate

import (
	"context"
	"os"
	"os/exec"
	"regexp"
	"strconv"
	"testing"

	"barline/model/clock"
)

// An outside client, mbpoll on libmodbus (Debian's mbpoll), reads the simulated
// gauges. It is skipped where it is missing, unless BARLINE_PEERS is set.
func TestMbpollReadsTheSimulatedGauges(t *testing.T) {
	if _, err := exec.LookPath("mbpoll"); err != nil {
		if os.Getenv("BARLINE_PEERS") != "" {
			t.Fatal("missing: mbpoll")
		}
		t.Skip("missing: mbpoll")
	}
	b := newBench(t, Options{Seed: 3})
	ctx, cancel := context.WithCancel(t.Context())
	defer b.Wait()
	defer cancel()
	ports, err := b.Serve(ctx, clock.NewScaled(1))
	if err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command("mbpoll", "-m", "rtu", "-a", "1", "-b", "19200", "-P", "even", "-t", "3:float", "-B", "-0", "-r", "0", "-1", ports["gauges"]).CombinedOutput()
	found := regexp.MustCompile(`\[0\]:\s+([0-9.]+)`).FindSubmatch(out)
	if err != nil || found == nil {
		t.Fatalf("%v\n%s", err, out)
	}
	if p, err := strconv.ParseFloat(string(found[1]), 64); err != nil || p < 0.9 || p > 1.3 {
		t.Errorf("cell A is %s bar, want about 1.1", found[1])
	}
}
