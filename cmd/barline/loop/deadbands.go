package loop

import (
	"math"
	"time"

	"barline/model/bench"
	"barline/model/live"
	"barline/model/reading"
)

// deadbands decides which readings go into the record: one that has moved
// beyond its channel's deadband since the last recorded one, one whose status
// changed, and one in every heartbeat. The series can be rebuilt from the
// record within the deadband.
type deadbands struct {
	heartbeat time.Duration
	band      [reading.RoleCount]float64 // SI unit of the role
	last      map[string]reading.Reading
}

func newDeadbands(b *bench.Bench) *deadbands {
	d := &deadbands{heartbeat: b.Logbook.Heartbeat.Duration(), last: make(map[string]reading.Reading)}
	for role := range d.band {
		switch reading.Role(role) {
		case reading.CellAPressure, reading.CellBPressure, reading.ManifoldPressure, reading.SupplyPressure,
			reading.Ambient, reading.ControllerSensor:
			d.band[role] = float64(b.Logbook.DeadbandPressure)
		case reading.FibreTemperature, reading.CellTemperature, reading.RoomTemperature:
			d.band[role] = float64(b.Logbook.DeadbandTemperature)
		case reading.Emission, reading.EmissionWidth:
			d.band[role] = float64(b.Logbook.DeadbandWavelength)
		case reading.EmissionStrength:
			d.band[role] = 0.005
		}
	}
	return d
}

// due returns the record of r if it is to be written.
func (d *deadbands) due(r reading.Reading) (live.ReadingData, bool) {
	last, seen := d.last[r.Channel]
	if seen && r.Status == last.Status && r.Reason == last.Reason && r.Taken.Mono-last.Taken.Mono < d.heartbeat &&
		(r.Status == reading.Failure || math.Abs(r.Value-last.Value) <= d.band[r.Role]) {
		return live.ReadingData{}, false
	}
	d.last[r.Channel] = r
	data := live.ReadingData{Channel: r.Channel, Role: r.Role.String(), Status: r.Status.String(), Reason: r.Reason}
	if r.Status != reading.Failure {
		data.Value = &r.Value
	}
	return data, true
}
