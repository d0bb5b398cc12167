package bench

import "barline/model/unit"

// fillDefaults fills in what an instrument's section leaves out and what
// depends on its protocol. Defaults that depend on nothing stand in the tags.
//
// A Modbus serial line defaults to 19200 baud, even parity, one stop bit
// (MODBUS over serial line V1.02, 2006, section 2.4 and 2.5.1); with parity
// none it has two stop bits, so that a character keeps its eleven bits. Other
// serial lines default to 9600 baud, no parity, one stop bit (common practice,
// no source). Registers are read once a second by function 3 from unit 1.
func (i *Instrument) fillDefaults() {
	modbus := i.Protocol == ModbusRTU || i.Protocol == ModbusTCP
	if i.Port != "" {
		if i.Baud == 0 {
			i.Baud = pick(i.Protocol == ModbusRTU, 19200, 9600)
		}
		if i.DataBits == 0 {
			i.DataBits = 8
		}
		if i.Parity == "" {
			i.Parity = pick(i.Protocol == ModbusRTU, "even", "none")
		}
		if i.StopBits == 0 {
			i.StopBits = pick(i.Protocol == ModbusRTU && i.Parity == "none", 2, 1)
		}
	}
	if i.Every == 0 && !i.Streams {
		i.Every = 1
	}
	if i.Timeout == 0 {
		i.Timeout = pick[unit.Second](modbus, 0.5, 1)
	}
	if i.Protocol == Lines && i.Checksum == "" {
		i.Checksum = "none"
	}
	if i.Protocol == SCPI && i.Identify == "" {
		i.Identify = "*IDN?"
	}
	for j := range i.Channel {
		c := &i.Channel[j]
		if modbus {
			if c.Unit == 0 {
				c.Unit = 1
			}
			if c.Function == 0 {
				c.Function = 3
			}
			if c.Format == "" {
				c.Format = "uint16"
			}
			if c.Order == "" {
				c.Order = "ABCD"
			}
		}
	}
}

func pick[T any](condition bool, yes, no T) T {
	if condition {
		return yes
	}
	return no
}
