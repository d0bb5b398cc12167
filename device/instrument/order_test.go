package instrument

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"barline/model/bench"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

func TestAttenuatorIsSentOnce(t *testing.T) {
	registers := map[byte]map[uint16]uint16{4: {7: 1000}}
	answer := units(t, registers)
	line := &scripted{answer: answer}
	// A count is a thousandth of the full energy.
	in := build(t, bench.Instrument{Name: "wheel", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		{Name: "attenuator", Role: reading.Attenuator, Unit: 4, Function: 3, Register: 7, Format: "uint16", Order: "ABCD", Write: "{value}", Factor: 1e-3, Symbol: "1", Step: 0.002},
	}})
	l := limit.Limits{MostEnergy: 2 * unit.Microjoule}
	order, err := l.Energy(1.3*unit.Microjoule, 2.6*unit.Microjoule)
	if err != nil {
		t.Fatal(err)
	}
	if err := in.Move(line, order); err != nil || registers[4][7] != 500 {
		t.Fatalf("attenuator stands at %d, %v", registers[4][7], err)
	}
	if err := in.Move(line, limit.EnergyOrder{}); !errors.Is(err, limit.ErrLimit) || registers[4][7] != 500 {
		t.Errorf("an order that no limit made: %v, stands at %d", err, registers[4][7])
	}
	sent := len(line.sent)
	line.answer = func(p []byte) []byte { // the write is taken, then nothing comes
		if p[1] == 6 {
			return answer(p)
		}
		return nil
	}
	if err := in.Move(line, order); err == nil || !strings.Contains(err.Error(), "not read back") {
		t.Errorf("an attenuator that does not answer: %v", err)
	}
	writes := 0
	for _, frame := range line.sent[sent:] {
		if frame[1] == 6 {
			writes++
		}
	}
	if writes != 1 {
		t.Errorf("sent %d times, want once", writes)
	}
	if in.Takes(l.Close(limit.Inlet)) || !in.Takes(order) || in.TakesHold() {
		t.Error("takes what it has not")
	}
}

// A zero goes to no wire. It is added to what the gauge reads, once, however
// often it is sent.
func TestZeroOfAGaugeIsAddedOnce(t *testing.T) {
	registers := map[byte]map[uint16]uint16{1: {0: 1012}}
	line := &scripted{answer: units(t, registers)}
	in := build(t, bench.Instrument{Name: "gauge", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		{Name: "cell A", Role: reading.CellAPressure, Unit: 1, Function: 3, Format: "uint16", Order: "ABCD", Factor: 100, Symbol: "Pa"},
	}})
	z, err := limit.Limits{MostZero: 50 * unit.Millibar}.Zero("cell A", 1.012*unit.Bar, 1*unit.Bar, 0)
	if err != nil {
		t.Fatal(err)
	}
	for range 2 {
		if err := in.Move(line, z); err != nil {
			t.Fatal(err)
		}
		got, err := in.Poll(line, clockOf(time.Millisecond), nil)
		if err != nil || len(got) != 1 || math.Abs(got[0].Value-1e5) > 1e-6 {
			t.Fatalf("%+v, %v", got, err)
		}
	}
	if err := in.Move(line, limit.ZeroShift{}); err == nil {
		t.Error("a shift that no limit made was taken")
	}
	other, err := limit.Limits{MostZero: 50 * unit.Millibar}.Zero("cell B", 1*unit.Bar, 1*unit.Bar, 0)
	if err != nil {
		t.Fatal(err)
	}
	if in.Takes(other) {
		t.Error("takes the zero of a gauge that it has not")
	}
}

func TestCountsTellHowAnInstrumentFares(t *testing.T) {
	registers := map[byte]map[uint16]uint16{1: {0: 1012}}
	answer, mute := units(t, registers), false
	line := &scripted{answer: func(p []byte) []byte {
		if mute {
			return nil
		}
		return answer(p)
	}}
	in := build(t, bench.Instrument{Name: "gauge", Protocol: bench.ModbusRTU, Channel: []bench.Channel{
		{Name: "cell A", Role: reading.CellAPressure, Unit: 1, Function: 3, Format: "uint16", Order: "ABCD", Factor: 100, Symbol: "Pa"},
	}})
	now := clockOf(time.Millisecond)
	for range 3 {
		got, err := in.Poll(line, now, nil)
		if err != nil {
			t.Fatal(err)
		}
		in.counts.passed(got)
		mute = true
	}
	c := in.Counts()
	if c.Asked != 3 || c.Answered != 1 || c.Silent != 2 || c.Readings[reading.Good] != 1 || c.Readings[reading.Failure] != 2 {
		t.Errorf("%+v", c)
	}
	if !strings.HasPrefix(c.Worst, "cell A: unit 1: no reply") || c.RoundTrip <= 0 || c.Slowest < c.RoundTrip {
		t.Errorf("%+v", c)
	}
}
