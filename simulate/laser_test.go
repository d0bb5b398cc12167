package simulate

import (
	"math"
	"testing"
	"time"

	"barline/device/modbus"
)

// registers of unit 4 as the wire has them.
func laserRegisters(t *testing.T, l *Line) (shutter, attenuator uint16) {
	t.Helper()
	request, err := modbus.AppendRequestRTU(nil, modbus.Request{Unit: 4, Function: modbus.ReadHolding, Count: 2})
	if err != nil {
		t.Fatal(err)
	}
	reply, err := modbus.DecodeReplyRTU(ask(t, l, request))
	if err != nil || len(reply.Values) != 2 {
		t.Fatalf("%+v, %v", reply, err)
	}
	return reply.Values[0], reply.Values[1]
}

// The pulse energy follows the attenuator, and the shutter's input tells when
// the light is gone.
func TestLaserObeysAndTells(t *testing.T) {
	b := newBench(t, Options{Seed: 1, Scenario: "quiet"})
	l := b.Lines()[gaugesLine]
	to(t, b, time.Second)
	before := b.energy
	if shutter, share := laserRegisters(t, l); shutter != 1 || share != 500 {
		t.Fatalf("shutter %d, attenuator %d", shutter, share)
	}
	set, err := modbus.AppendRequestRTU(nil, modbus.Request{Unit: 4, Function: modbus.WriteSingle, Address: 1, Values: []uint16{600}})
	if err != nil {
		t.Fatal(err)
	}
	if got := ask(t, l, set); string(got) != string(set) {
		t.Fatalf("the write was answered with % X", got)
	}
	to(t, b, 2*time.Second)
	if _, share := laserRegisters(t, l); share != 600 {
		t.Errorf("attenuator at %d", share)
	}
	// The laser itself drifts by some tenths of a per cent.
	if ratio := b.energy / before; math.Abs(ratio-1.2) > 0.02 {
		t.Errorf("energy changed by %.3f, want 1.2", ratio)
	}
	if err := b.Inject(Fault{Kind: Shutter}); err != nil {
		t.Fatal(err)
	}
	to(t, b, 3*time.Second)
	if shutter, _ := laserRegisters(t, l); shutter != 0 {
		t.Error("a shut shutter says that it is open")
	}
}
