package flow

import (
	"testing"
	"time"

	"barline/model/unit"
)

// One core step of 50 ms on 200 volumes while the cells ramp at 0.2 bar/s with
// gauges that are noisy by a millibar.
func BenchmarkCoreStep(b *testing.B) {
	c := core(b, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(b, "argon"), Temperature: room, Cells: 200})
	if err := c.Fill(7e5, 7e5, room); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	p, rate := 7e5, 0.2e5*0.05
	i := 0
	for b.Loop() {
		if p += rate; p > 12e5 || p < 7e5 {
			rate = -rate
		}
		i++
		noise := float64(i*7919%200 - 100)
		if err := c.Advance(50*time.Millisecond, unit.Pascal(p+noise), unit.Pascal(p-noise), room); err != nil {
			b.Fatal(err)
		}
	}
}

// The first step after a jump, the dearest there is.
func BenchmarkCoreJump(b *testing.B) {
	c := core(b, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(b, "argon"), Temperature: room, Cells: 200})
	if err := c.Fill(1e5, 1e5, room); err != nil {
		b.Fatal(err)
	}
	if err := c.Advance(0, 9e5, 9e5, room); err != nil {
		b.Fatal(err)
	}
	from := c.State()
	b.ReportAllocs()
	for b.Loop() {
		if err := c.Restore(from); err != nil {
			b.Fatal(err)
		}
		if err := c.Advance(50*time.Millisecond, 9e5, 9e5, room); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkTimeToSettle(b *testing.B) {
	c := core(b, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(b, "argon"), Temperature: room, Cells: 200})
	if err := c.Advance(0, 9e5, 9e5, room); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, ok := c.TimeToSettle(1000); !ok {
			b.Fatal("no answer")
		}
	}
}

func BenchmarkLag(b *testing.B) {
	c := core(b, Spec{Radius: 17e-6, Length: 0.3, Gas: gasNamed(b, "argon"), Temperature: room, Cells: 200})
	if err := c.Advance(time.Second, 9e5, 9.01e5, room); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		c.Lag()
	}
}
