//go:build linux

package instrument

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"net"
	"os"
	"os/exec"
	"strings"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"github.com/creack/pty"
	"go.uber.org/goleak"

	"barline/device/link"
	"barline/model/bench"
	"barline/model/clock"
	"barline/model/reading"
	"barline/model/unit"
)

// The far end of the streaming benchmark is a process of its own, this test
// binary, so that what it costs is not counted as ours.
const (
	talkerEnv = "BARLINE_TALKER" // tcp or pty
	talkers   = 8
)

func TestMain(m *testing.M) {
	if kind := os.Getenv(talkerEnv); kind != "" { // the far end of BenchmarkStreams
		if err := talk(kind); err != nil {
			fmt.Fprintln(os.Stderr, err)
			os.Exit(1)
		}
		return
	}
	goleak.VerifyTestMain(m)
}

// talk offers lines on connections or terminals, prints where, waits for a
// byte on standard input and then says one numbered line a millisecond on each.
func talk(kind string) error {
	var out [talkers]io.Writer
	var listeners [talkers]net.Listener
	for i := range out {
		if kind == "tcp" {
			l, err := net.Listen("tcp", "127.0.0.1:0")
			if err != nil {
				return err
			}
			listeners[i] = l
			fmt.Println(l.Addr())
			continue
		}
		far, near, err := pty.Open()
		if err != nil {
			return err
		}
		out[i] = far
		fmt.Println(near.Name())
	}
	for i, l := range listeners {
		if l == nil {
			continue
		}
		conn, err := l.Accept()
		if err != nil {
			return err
		}
		out[i] = conn
	}
	if _, err := os.Stdin.Read(make([]byte, 1)); err != nil {
		return err
	}
	start, buf := time.Now(), make([]byte, 0, 4096)
	tick := time.NewTicker(time.Millisecond)
	for said := 0; ; {
		<-tick.C
		due := int(time.Since(start) / time.Millisecond)
		for buf = buf[:0]; said < due; said++ {
			buf = fmt.Appendf(buf, "N %d P 2.385 bar\r\n", said)
		}
		for _, w := range out {
			if _, err := w.Write(buf); err != nil {
				return nil // the reader has seen enough
			}
		}
	}
}

// counter is a Sink that checks that readings are numbered without a gap and
// their stamps ascend.
type counter struct {
	next   float64
	at     time.Duration
	seen   atomic.Int64
	lost   atomic.Int64
	broken atomic.Int64 // stamps that step back, or failures
}

func (c *counter) Reading(r reading.Reading) {
	if r.Status != reading.Good || r.Taken.Mono < c.at {
		c.broken.Add(1)
		return
	}
	c.lost.Add(int64(r.Value - c.next))
	c.next, c.at = r.Value+1, r.Taken.Mono
	c.seen.Add(1)
}
func (c *counter) Link(string, bool, string, reading.Stamp) {}
func (c *counter) Answer(uint64, error, reading.Stamp)      {}

// BenchmarkStreams reads 8 channels of 1000 lines a second; one operation is
// one line of each, so that it takes a millisecond of the wall.
//
//	go test -run xxx -bench Streams -benchtime 10s ./device/instrument
func BenchmarkStreams(b *testing.B) {
	for _, kind := range []string{"tcp", "pty"} {
		b.Run(kind, func(b *testing.B) { benchmarkStreams(b, kind) })
	}
}

func benchmarkStreams(b *testing.B, kind string) {
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), talkerEnv+"="+kind)
	cmd.Stderr = os.Stderr
	in, err := cmd.StdinPipe()
	if err != nil {
		b.Fatal(err)
	}
	out, err := cmd.StdoutPipe()
	if err != nil {
		b.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		b.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	ended := make(chan struct{})
	defer func() {
		cancel()
		for range talkers {
			<-ended
		}
		cmd.Process.Kill()
		cmd.Wait()
	}()
	var counters [talkers]counter
	names, opened := bufio.NewReader(out), make(chan struct{}, talkers)
	for i := range counters {
		name, err := names.ReadString('\n')
		if err != nil {
			b.Fatal(err)
		}
		spec := bench.Instrument{Name: "talker", Protocol: bench.Lines, Streams: true, Pattern: "N {n} P {p} bar",
			Channel: []bench.Channel{{Name: "n", Field: "n", Factor: 1, Symbol: "V"}}}
		if kind == "tcp" {
			spec.Address = strings.TrimSpace(name)
		} else {
			spec.Port = strings.TrimSpace(name)
		}
		opener, err := link.NewOpener(spec)
		if err != nil {
			b.Fatal(err)
		}
		instrument, err := New(spec, unit.Bar)
		if err != nil {
			b.Fatal(err)
		}
		open := func(ctx context.Context) (link.Line, error) {
			line, err := opener.Open(ctx)
			opened <- struct{}{}
			return line, err
		}
		r := NewRunner(instrument, open, clock.NewScaled(1), &counters[i], nil)
		go func() {
			r.Run(ctx)
			ended <- struct{}{}
		}()
	}
	for range talkers {
		<-opened
	}
	before, start := usage(b), time.Now()
	b.ResetTimer()
	if _, err := in.Write([]byte{'.'}); err != nil {
		b.Fatal(err)
	}
	poll := time.NewTicker(20 * time.Millisecond)
	defer poll.Stop()
	for done := false; !done; {
		<-poll.C
		done = true
		for i := range counters {
			done = done && counters[i].seen.Load() >= int64(b.N)
		}
		if time.Since(start) > time.Duration(b.N)*time.Millisecond+20*time.Second {
			b.Fatal("lines are missing")
		}
	}
	b.StopTimer()
	wall, cpu := time.Since(start), usage(b)-before
	b.ReportMetric(100*cpu.Seconds()/wall.Seconds(), "cpu-%")
	var lost, broken int64
	for i := range counters {
		lost += counters[i].lost.Load()
		broken += counters[i].broken.Load()
	}
	b.ReportMetric(float64(lost), "lost")
	if lost > 0 || broken > 0 {
		b.Errorf("%d readings lost, %d broken", lost, broken)
	}
}

// usage is the processor time of this process.
func usage(tb testing.TB) time.Duration {
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		tb.Fatal(err)
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}
