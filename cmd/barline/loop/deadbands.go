package loop

import (
	"time"

	"barline/logbook"
	"barline/model/bench"
	"barline/model/live"
	"barline/model/reading"
)

// deadbands decides which readings go into the record, see logbook.Deadband.
type deadbands struct {
	heartbeat time.Duration
	capture   time.Duration
	band      [reading.RoleCount]float64 // SI unit of the role
	channel   map[string]*logbook.Deadband
}

func newDeadbands(b *bench.Bench, capture time.Duration) *deadbands {
	d := &deadbands{capture: capture, heartbeat: b.Logbook.Heartbeat.Duration(), channel: make(map[string]*logbook.Deadband)}
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
		case reading.InletValve, reading.PumpValve, reading.VentValve:
			d.band[role] = 0.02 // of a proportional valve's opening
		}
	}
	return d
}

// due returns the record of r if it is to be written.
func (d *deadbands) due(r reading.Reading) (live.ReadingData, bool) {
	band := d.channel[r.Channel]
	if band == nil {
		band = &logbook.Deadband{Width: d.band[r.Role], Heartbeat: d.heartbeat}
		band.CaptureUntil(d.capture)
		d.channel[r.Channel] = band
	}
	if !band.Due(r) {
		return live.ReadingData{}, false
	}
	data := live.ReadingData{Channel: r.Channel, Role: r.Role.String(), Status: r.Status.String(), Reason: r.Reason}
	if r.Status != reading.Failure {
		data.Value = &r.Value
	}
	return data, true
}
