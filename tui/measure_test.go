//go:build soak && unix

package tui

import (
	"context"
	"slices"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"github.com/creack/pty"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
	"barline/tui/frame"
	"barline/tui/tuitest"
)

// TestTrafficAndProcessor says how many bytes a second the screen sends and
// how much of a core it takes, with readings at 10 Hz:
//
//	go test ./tui -tags soak -run TrafficAndProcessor -v
//
// Without charts 400 bytes a second are the bound, for a line of 9600 baud.
func TestTrafficAndProcessor(t *testing.T) {
	for _, c := range []struct {
		name    string
		filling bool
		plain   bool
		most    float64 // bytes a second; 0: none
	}{{"charts, at rest", false, false, 0}, {"charts, filling", true, false, 0}, {"no charts, at rest", false, true, 400}, {"no charts, filling", true, true, 400}} {
		t.Run(c.name, func(t *testing.T) {
			src := newFake(tuitest.Calm())
			terminal, tty, err := pty.Open()
			if err != nil {
				t.Fatal(err)
			}
			if err := pty.Setsize(terminal, &pty.Winsize{Rows: 40, Cols: 120}); err != nil {
				t.Fatal(err)
			}
			var out atomic.Int64
			go func() {
				buf := make([]byte, 64<<10)
				for {
					n, err := terminal.Read(buf)
					if err != nil {
						return
					}
					out.Add(int64(n))
				}
			}()
			ctx, cancel := context.WithCancel(context.Background())
			done := make(chan error, 1)
			go func() {
				done <- Run(ctx, src, Options{Style: Style{Colours: frame.Palette}, In: tty, Out: tty, Plain: c.plain})
			}()
			ring := trend.NewRing()
			tick := time.NewTicker(100 * time.Millisecond)
			defer tick.Stop()
			var before, after syscall.Rusage
			var from int64
			const warm, total = 20, 220
			for i := range total {
				if i == warm {
					from = out.Load()
					syscall.Getrusage(syscall.RUSAGE_SELF, &before)
				}
				<-tick.C
				now := *movedOn(src.Snapshot(), 100*time.Millisecond)
				v := 9e5 + 150*float64(i%7-3)
				if c.filling {
					v += 2e3 * float64(i)
				}
				ring.Add(now.Now.Mono, v)
				now.PressureA = ring.View()
				now.Latest[reading.CellAPressure].Value = v
				for role, noise := range map[reading.Role]float64{
					reading.CellBPressure: 150, reading.ControllerSensor: 150, reading.FibreTemperature: 0.1,
					reading.Emission: 0.1e-9, reading.EmissionWidth: 0.1e-9,
				} {
					now.Latest[role].Value += noise * float64(i%5-2)
				}
				now.Core = unit.Pascal(v)
				now.Residual = unit.Metre(float64(i%9-4) * 0.1e-9)
				src.set(&now)
			}
			syscall.Getrusage(syscall.RUSAGE_SELF, &after)
			seconds := float64(total-warm) / 10
			rate := float64(out.Load()-from) / seconds
			cpu := float64(after.Utime.Nano()+after.Stime.Nano()-before.Utime.Nano()-before.Stime.Nano()) / 1e9 / seconds
			cancel()
			<-done
			tty.Close()
			terminal.Close()
			t.Logf("%.0f bytes/s, %.1f %% of a core", rate, 100*cpu)
			if c.most > 0 && rate > c.most {
				t.Errorf("%.0f bytes/s, expected at most %.0f", rate, c.most)
			}
		})
	}
}

// movedOn moves a snapshot on, its readings fresh.
func movedOn(s *live.Snapshot, by time.Duration) *live.Snapshot {
	now := *s
	now.Now.Mono += by
	now.Now.UTC = now.Now.UTC.Add(by)
	for i := range now.Latest {
		if now.Latest[i].Channel != "" {
			now.Latest[i].Taken.Mono += by
		}
	}
	return &now
}

// TestChangeToScreen says how long a new value takes from the source to the
// line, on the bench page with charts:
//
//	go test ./tui -tags soak -run ChangeToScreen -v
func TestChangeToScreen(t *testing.T) {
	src := newFake(tuitest.Calm())
	_, out, _ := start(t, src)
	out.wait(t, "9.003 bar")
	const changes = 300
	delays := make([]time.Duration, 0, changes)
	for i := range changes {
		now := *movedOn(src.Snapshot(), 50*time.Millisecond)
		value := 9.1e5 + 100*float64(i)
		now.Latest[reading.CellAPressure].Value = value
		from := time.Now()
		src.set(&now)
		out.wait(t, pressureText(unit.Pascal(value)))
		delays = append(delays, time.Since(from))
		<-time.After(time.Duration(20+i%37) * time.Millisecond) // not in step with the redraw
	}
	slices.Sort(delays)
	t.Logf("half within %v, 99 %% within %v, all within %v", delays[changes/2], delays[changes*99/100], delays[changes-1])
	if p99 := delays[changes*99/100]; p99 > 50*time.Millisecond {
		t.Errorf("99 %% of changes are on the screen within %v, expected 50 ms", p99)
	}
}
