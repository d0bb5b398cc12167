package clock

import (
	"testing"
	"testing/synctest"
	"time"
)

func TestScaledClockRunsAsFastAsItIsTold(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		c := NewScaled(20)
		before := c.Now()
		for range 600 {
			<-time.After(5 * time.Millisecond)
			c.Now()
		}
		after := c.Now()
		if got := after.Mono - before.Mono; got != time.Minute {
			t.Errorf("3 s on the wall are %v on the bench, want 1 min", got)
		}
		if got := after.UTC.Sub(before.UTC); got != time.Minute {
			t.Errorf("UTC moved by %v, want 1 min", got)
		}
		if got := c.Wall(time.Minute); got != 3*time.Second {
			t.Errorf("1 min on the bench lasts %v, want 3 s", got)
		}
	})
}

func TestSimulatedTimeStandsStillWhileTheMachineStalls(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		simulated, real := NewScaled(20), NewScaled(1)
		<-time.After(3 * time.Second)
		if got := simulated.Now().Mono; got != 200*time.Millisecond {
			t.Errorf("a stall of 3 s was %v on the bench, want 200 ms", got)
		}
		if got := real.Now().Mono; got != 3*time.Second {
			t.Errorf("real time lost %v in a stall", 3*time.Second-got)
		}
	})
}

func TestFakeClockStepsUTCAlone(t *testing.T) {
	c := NewFake(time.Date(2026, 12, 1, 11, 42, 5, 0, time.UTC))
	c.Advance(time.Second)
	c.Step(-time.Hour)
	now := c.Now()
	if now.Mono != time.Second || now.UTC.Hour() != 10 {
		t.Errorf("mono %v, utc %v", now.Mono, now.UTC)
	}
}
