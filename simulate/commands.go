package simulate

import (
	"bytes"
	"strconv"
	"strings"
	"time"

	"barline/device/scpi"
)

// commands is the controller's line: SCPI, pressures in bar, openings 0 to 1.
//
//	*IDN?  *RST  *CLS  *OPC?  SYSTem:ERRor?
//	MEASure:PRESsure?                  its sensor, on the manifold
//	SOURce:PRESsure:LEVel <bar>        setpoint; and ?
//	SOURce:PRESsure:MODE HOLD|CONTrol  and ?
//	SOURce:PRESsure:WATChdog <s>       silence after which it holds, 0 never; and ?
//	OUTPut:INLet?  OUTPut:VENT?  OUTPut:PUMP?
//	OUTPut:CELLa ON|OFF                OUTPut:CELLb ON|OFF; and ?
type commands struct {
	errors scpi.Queue
}

const (
	identity = "Heron,pressure controller,0,1.0"
	most     = 20.0    // bar, highest setpoint it takes
	longest  = 1 << 10 // bytes of a message
)

func (c *commands) take(b *Bench, in []byte) (rest, out []byte) {
	end := bytes.IndexByte(in, '\n')
	if end < 0 {
		if len(in) > longest {
			c.errors.Push(scpi.CommandError)
			return nil, nil
		}
		return in, nil
	}
	b.controller.heard = b.time()
	units, err := scpi.ParseMessage(string(scpi.TrimTerminator(in[:end])))
	if err != nil {
		c.errors.Push(scpi.CommandError)
		return in[end+1:], nil
	}
	var answers []string
	for _, u := range units {
		answer, problem := c.obey(b, u)
		if problem != scpi.NoError {
			c.errors.Push(problem)
		} else if u.Query {
			answers = append(answers, answer)
		}
	}
	if len(answers) > 0 && !b.faults.dead["controller"] {
		out = []byte(strings.Join(answers, ";") + "\n")
	}
	return in[end+1:], out
}

// obey carries out one unit and returns the answer to a query.
func (c *commands) obey(b *Bench, u scpi.Unit) (string, scpi.Error) {
	is := func(keyword string, query bool, args int) bool {
		return u.Matches(keyword) && u.Query == query && len(u.Args) == args
	}
	k := &b.controller
	switch {
	case is("*IDN", true, 0):
		return identity, scpi.NoError
	case is("*OPC", true, 0):
		return "1", scpi.NoError
	case is("*CLS", false, 0):
		c.errors.Clear()
		return "", scpi.NoError
	case is("*RST", false, 0):
		k.hold(b.asked)
		k.watchdog = 0
		return "", scpi.NoError
	case is("SYSTem:ERRor", true, 0), is("SYSTem:ERRor:NEXT", true, 0):
		return c.errors.Pop().Line(), scpi.NoError
	case is("MEASure:PRESsure", true, 0):
		return fixed(b.sensor.read(b.noise, b.frame)/bar, 5), scpi.NoError
	case is("SOURce:PRESsure:LEVel", true, 0):
		return fixed(k.setpoint/bar, 5), scpi.NoError
	case is("SOURce:PRESsure:LEVel", false, 1):
		v, problem := number(u.Args[0], 0, most)
		if problem == scpi.NoError {
			k.aim(b.asked, v*bar)
		}
		return "", problem
	case is("SOURce:PRESsure:MODE", true, 0):
		if k.holding {
			return "HOLD", scpi.NoError
		}
		return "CONT", scpi.NoError
	case is("SOURce:PRESsure:MODE", false, 1):
		mode := scpi.Unit{Header: u.Args[0]}
		switch {
		case mode.Matches("HOLD"):
			k.hold(b.asked)
		case mode.Matches("CONTrol"):
			k.control()
		default:
			return "", scpi.DataOutOfRange
		}
		return "", scpi.NoError
	case is("SOURce:PRESsure:WATChdog", true, 0):
		return fixed(k.watchdog.Seconds(), 1), scpi.NoError
	case is("SOURce:PRESsure:WATChdog", false, 1):
		v, problem := number(u.Args[0], 0, 3600)
		if problem == scpi.NoError {
			k.watchdog = time.Duration(v * float64(time.Second))
		}
		return "", problem
	}
	for i, keyword := range [valveCount]string{"OUTPut:INLet", "OUTPut:VENT", "OUTPut:PUMP", "OUTPut:CELLa", "OUTPut:CELLb"} {
		v := &k.valves[i]
		if is(keyword, true, 0) {
			return fixed(v.opening, 3), scpi.NoError
		}
		if i >= cellAValve && is(keyword, false, 1) {
			open, problem := onOff(u.Args[0])
			if problem == scpi.NoError {
				v.target = open
			}
			return "", problem
		}
	}
	return "", scpi.UndefinedHeader
}

func fixed(v float64, digits int) string { return strconv.FormatFloat(v, 'f', digits, 64) }

func number(text string, low, high float64) (float64, scpi.Error) {
	v, err := scpi.ParseNumber(text)
	if err != nil {
		return 0, scpi.CommandError
	}
	if !(v >= low && v <= high) {
		return 0, scpi.DataOutOfRange
	}
	return v, scpi.NoError
}

func onOff(text string) (float64, scpi.Error) {
	switch strings.ToUpper(text) {
	case "ON", "1":
		return 1, scpi.NoError
	case "OFF", "0":
		return 0, scpi.NoError
	}
	return 0, scpi.DataOutOfRange
}
