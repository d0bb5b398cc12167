package bench

import "barline/model/form"

// Key is one key of bench files and what it is for.
type Key struct {
	form.Key
	Meaning string
}

// Keys lists every key that Parse accepts, in the order of the sample.
func Keys() []Key {
	var list []Key
	for _, k := range form.Keys(new(Bench)) {
		list = append(list, Key{k, meaning[k.Path]})
	}
	return list
}

// meaning says what each key is for, in a line. Defaults that depend on the
// protocol stand here too.
var meaning = map[string]string{
	"bench.name":                     "what records and screens call the bench",
	"bench.cylinder":                 "gas cylinder and grade, for the record",
	"bench.fibre_piece":              "which piece, and when it was cleaved",
	"bench.spectrometer_calibration": "when and with what",

	"fibre.kind":                   "form of the cladding",
	"fibre.core_diameter":          "inner diameter of the core",
	"fibre.wall":                   "thickness of the glass round the core; not for a capillary",
	"fibre.length":                 "between the cells",
	"fibre.loss":                   "attenuation as measured",
	"fibre.cladding_holes":         "how many hollow tubes are open to the gas; they fill later than the core",
	"fibre.cladding_hole_diameter": "of one of them",

	"gas.species":    "what fills the fibre",
	"gas.density":    "equation of state: full, two virial coefficients, or ideal",
	"gas.index":      "source of the refractive index; without it the gas's own default",
	"gas.n2":         "source of the nonlinear index, or a value such as 9.11e-24 m2/W at 273.15 K and 101325 Pa",
	"gas.air":        "share of air left by the last purge",
	"gas.supply_air": "share of air in what the cylinder gives",

	"pulse.wavelength":      "of the pump, in vacuum",
	"pulse.duration":        "full width at half maximum of the transform-limited pulse",
	"pulse.shape":           "its envelope",
	"pulse.energy":          "in the fibre, behind the coupling",
	"pulse.full_energy":     "in the fibre with the attenuator wide open; without it that of energy",
	"pulse.gdd":             "group-delay dispersion put on it",
	"pulse.repetition_rate": "pulses per second",

	"panel.cell_volume":   "of each cell",
	"panel.supply":        "behind the regulator",
	"panel.ambient":       "air pressure where no barometer is connected; gauge pressures count from it",
	"panel.line_volume":   "manifold that is open to the cells",
	"panel.inlet":         "sonic conductance of the needle (ISO 6358)",
	"panel.vent":          "sonic conductance of the vent",
	"panel.pump_speed":    "volume per time at the cells",
	"panel.pump_ultimate": "lowest pressure that the pump reaches",
	"panel.wall_time":     "in which the gas takes the temperature of the walls",

	"limits.fibre_seal":    "pressure rating",
	"limits.cells":         "pressure rating",
	"limits.windows":       "pressure rating",
	"limits.line":          "pressure rating; the lowest of the four bounds every setpoint",
	"limits.rise_rate":     "how fast the setpoint may rise",
	"limits.fall_rate":     "how fast it may fall",
	"limits.pump_below":    "the pump opens only below this pressure; 0: never",
	"limits.stale":         "a reading older than this is a failure",
	"limits.confirm":       "a command that is not confirmed by then leads to HOLD",
	"limits.disagreement":  "by which gauges that should agree may differ",
	"limits.arming":        "without a command for so long, the bench is safe again",
	"limits.caution_above": "the cautions are asked for before gas goes above this pressure",
	"limits.energy":        "most of a pulse in the fibre; without it the attenuator is never moved",
	"limits.zero":          "by which a gauge may ever be corrected",
	"limits.follow":        "setpoint and pressure further apart than this lead to HOLD",

	"instrument.name":        "what alarms and records call it",
	"instrument.protocol":    "what it speaks",
	"instrument.port":        "serial port: a device, or usb:VENDOR:PRODUCT as barline ports lists it",
	"instrument.address":     "host:port, instead of port",
	"instrument.command":     "a program that talks on its standard streams, instead of port",
	"instrument.baud":        "default 19200 for modbus-rtu, else 9600",
	"instrument.data_bits":   "default 8",
	"instrument.parity":      "default even for modbus-rtu, else none",
	"instrument.stop_bits":   "default 1; 2 for modbus-rtu without parity",
	"instrument.every":       "how often it is read; default 1 s",
	"instrument.timeout":     "for an answer; default 0.5 s for Modbus, else 1 s",
	"instrument.streams":     "it talks by itself (lines)",
	"instrument.pattern":     "one of its lines with fields in braces (lines)",
	"instrument.checksum":    "at the end of each line (lines); default none",
	"instrument.identify":    "query of the name, asked behind every query (scpi); default *IDN?, \"none\" for instruments without",
	"instrument.hold":        "commands that HOLD sends, in order (scpi, lines)",
	"instrument.resume":      "commands before the first setpoint after a HOLD",
	"instrument.calibration": "wavelength of pixel i as c0, c1, c2 …, for whole spectra (lines)",
	"instrument.dark":        "counts of a pixel without light",
	"instrument.threshold":   "counts above dark that the highest pixel must reach",
	"instrument.saturation":  "counts at which a pixel is full",
	"instrument.terminator":  "what ends a message that is sent (scpi, lines); default lf",
	"instrument.ask":         "text that asks for a line (lines)",
	"instrument.errors":      "query of the error queue, after each write (scpi)",
	"instrument.turnaround":  "silence before each message on RS-485",
	"instrument.echo":        "the converter sends our own bytes back",
	"instrument.traffic":     "file that keeps every byte, for diagnosis",

	"instrument.channel.name":       "what the screen shows",
	"instrument.channel.role":       "what the number is to the bench",
	"instrument.channel.unit":       "Modbus unit; default 1",
	"instrument.channel.function":   "Modbus function 3 or 4; default 3",
	"instrument.channel.register":   "Modbus register, counted from 0",
	"instrument.channel.format":     "of the number in the registers; default uint16",
	"instrument.channel.order":      "of its bytes, A the most significant; default ABCD",
	"instrument.channel.query":      "that reads it (scpi)",
	"instrument.channel.write":      "command with {value} (scpi); {value} alone for Modbus",
	"instrument.channel.field":      "of the pattern (lines)",
	"instrument.channel.scale":      "what the number 1 means, such as \"2.5 mbar\"",
	"instrument.channel.offset":     "what the number 0 means, where it is not zero",
	"instrument.channel.gauge":      "a pressure that counts from air pressure",
	"instrument.channel.range":      "lowest and highest value in specification",
	"instrument.channel.span":       "instead of scale: the quantities at 4 mA and at 20 mA",
	"instrument.channel.current":    "with span: the current that the number 1 means; default 1 mA",
	"instrument.channel.gas_factor": "multiplies a gauge that depends on the gas",
	"instrument.channel.resolution": "a setpoint read back this near was taken",
	"instrument.channel.stale":      "instead of that of [limits]",

	"emission.answer":      "which prediction is wanted; estimate until full-field runs stand",
	"emission.reports":     "what the spectrometer sends",
	"emission.wavelengths": "in what it gives them",

	"logbook.folder":               "where to record; without it one in your data folder",
	"logbook.heartbeat":            "a channel that does not change is written this often",
	"logbook.deadband_pressure":    "smaller changes are not written",
	"logbook.deadband_temperature": "smaller changes are not written",
	"logbook.deadband_wavelength":  "smaller changes are not written",
	"logbook.compress":             "finished segments",

	"drift.learn":       "shortest quiet stretch that is learnt from",
	"drift.false_alarm": "mean time between false alarms of one chart",
	"drift.wavelength":  "smallest drift of the emission that matters",
	"drift.strength":    "of its strength, relative",
	"drift.width":       "of its width, relative",
	"drift.gauges":      "of cell A less cell B",
	"drift.leak":        "of the shut panel",

	"alarms.on_alarm": "a program and its arguments, for people who are elsewhere",

	"screen.background": "of the terminal",
	"screen.time_zone":  "local, UTC or a name such as Europe/Lisbon",
	"screen.ascii":      "plain characters only",
}
