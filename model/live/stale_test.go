package live

import (
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/reading"
	"barline/model/unit"
)

// A thermometer that is asked every ten seconds may say itself that its
// readings last; the bench's own limit holds for all others.
func TestAChannelMayHaveAStalenessOfItsOwn(t *testing.T) {
	var s State
	s.staleBy[reading.FibreTemperature] = 30 * time.Second
	for _, role := range []reading.Role{reading.FibreTemperature, reading.CellAPressure} {
		s.Latest[role] = reading.Reading{Channel: role.String(), Role: role, Status: reading.Good}
	}
	const limit = 2 * time.Second
	for _, c := range []struct {
		age               time.Duration
		thermometer, cell reading.Status
	}{
		{time.Second, reading.Good, reading.Good},
		{10 * time.Second, reading.Good, reading.Failure},
		{31 * time.Second, reading.Failure, reading.Failure},
	} {
		s.Now.Mono = c.age
		if got := s.Reading(reading.FibreTemperature, limit).Status; got != c.thermometer {
			t.Errorf("thermometer after %v: %v, want %v", c.age, got, c.thermometer)
		}
		if got := s.Reading(reading.CellAPressure, limit).Status; got != c.cell {
			t.Errorf("cell after %v: %v, want %v", c.age, got, c.cell)
		}
	}
}

// Ramps lean on pressures, so that no channel may make theirs last longer.
func TestAPressureCannotBeKeptFresh(t *testing.T) {
	var s State
	s.Latest[reading.CellAPressure] = reading.Reading{Channel: "A", Status: reading.Good}
	s.staleBy[reading.CellAPressure] = time.Hour
	s.Now.Mono = 3 * time.Second
	if got := s.Reading(reading.CellAPressure, 2*time.Second).Status; got != reading.Failure {
		t.Errorf("3 s old: %v", got)
	}
	s.staleBy[reading.CellAPressure] = time.Second
	s.Now.Mono = 1500 * time.Millisecond
	if got := s.Reading(reading.CellAPressure, 2*time.Second).Status; got != reading.Failure {
		t.Errorf("1.5 s old, allowed 1 s: %v", got)
	}
}

func TestTheBenchFileGivesTheStaleness(t *testing.T) {
	b := testBench()
	b.Instrument[0].Channel = []bench.Channel{{Name: "fibre", Role: reading.FibreTemperature, Stale: 30}}
	_, s, err := New(b, straight{})
	if err != nil {
		t.Fatal(err)
	}
	if got := s.staleBy[reading.FibreTemperature]; got != 30*time.Second {
		t.Errorf("stale after %v, want 30 s", got)
	}
}

// Two gauges that were read at different times of a ramp differ by what the
// gas moved meanwhile.
func TestReadingsOfDifferentTimesMayDiffer(t *testing.T) {
	core, _, err := New(testBench(), straight{})
	if err != nil {
		t.Fatal(err)
	}
	at := func(s float64) reading.Reading {
		return reading.Reading{Taken: reading.Stamp{Mono: time.Duration(s * float64(time.Second))}}
	}
	if got := core.between(at(1.5), at(1)); got < 0.0999*unit.Bar || got > 0.1001*unit.Bar {
		t.Errorf("half a second apart at 0.2 bar/s: %v", got)
	}
	if got := core.between(at(1), at(1)); got != 0 {
		t.Errorf("at once: %v", got)
	}
}
