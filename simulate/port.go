package simulate

import (
	"time"

	"barline/device/modbus"
)

// port is one instrument's end of its line.
type port struct {
	name  string
	index int64
	talk  talker
	in    []byte        // of a request that is not whole yet
	heard time.Duration // when the last byte of it came
	asked []byte        // the last request, for an echo
	late  []byte        // a reply that comes with the next one
	out   []byte        // said, and not yet taken by the other end
	said  int64         // replies so far
}

// talker is what an instrument does with bytes: it takes whole requests off
// the front of in, and returns the rest and what it answers.
type talker interface {
	take(b *Bench, in []byte) (rest, out []byte)
}

// Names of the lines, as the bench file names its instruments.
const (
	gaugesLine       = "gauges"
	controllerLine   = "controller"
	spectrometerLine = "spectrometer"
)

func newPorts() map[string]*port {
	m := map[string]*port{}
	for i, p := range []*port{
		{name: gaugesLine, talk: &gauges{}},
		{name: controllerLine, talk: &commands{}},
		{name: spectrometerLine, talk: mute{}},
	} {
		p.index = int64(i)
		m[p.name] = p
	}
	return m
}

// mute is an instrument that talks by itself and does not listen.
type mute struct{}

func (mute) take(*Bench, []byte) (rest, out []byte) { return nil, nil }

const (
	// A request that stops for longer is given up.
	patience = 50 * time.Millisecond
	// An instrument keeps no more than this for a reader who does not come.
	mostUnread = 128 << 10
)

// receive gives bytes to the instrument, at a time that only grows.
func (p *port) receive(b *Bench, bytes []byte, at time.Duration) {
	if at-p.heard > patience {
		p.in = nil
	}
	p.heard = at
	p.in = append(p.in, bytes...)
	for {
		rest, out := p.talk.take(b, p.in)
		p.asked = append(p.asked[:0], p.in[:len(p.in)-len(rest)]...)
		done := len(rest) == len(p.in)
		p.in = rest
		if len(out) > 0 {
			p.say(b, out)
		}
		if done {
			return
		}
	}
}

// say puts bytes on the line, through what noise there is on it.
func (p *port) say(b *Bench, bytes []byte) {
	p.said++
	if share := b.faults.garbage[p.name]; share > 0 {
		bytes = spoil(b.noise, p.index, p.said, share, bytes)
	}
	if share := b.faults.confused[p.name]; share > 0 {
		bytes = p.confuse(b.noise, share, bytes)
	}
	p.out = append(p.out, bytes...)
	if over := len(p.out) - mostUnread; over > 0 {
		p.out = append([]byte(nil), p.out[over:]...)
	}
}

// confuse says a share of all replies late, with the one that follows, or
// twice, or behind an echo of the question, or under the name of another unit.
// Each of them is whole: nothing but what was asked tells that it is wrong.
func (p *port) confuse(n noise, share float64, bytes []byte) []byte {
	s := ofGarbage + source(p.index)
	out := append(p.late, bytes...)
	p.late = nil
	if n.uniform(s, -1-2*p.said) >= share {
		return out
	}
	switch r := n.bits(s, -2-2*p.said); r % 4 {
	case 0:
		p.late = append([]byte(nil), bytes...)
		return out[:len(out)-len(bytes)]
	case 1:
		return append(out, bytes...)
	case 2:
		return append(append([]byte(nil), p.asked...), out...)
	default:
		if reply, err := modbus.DecodeReplyRTU(bytes); err == nil {
			reply.Unit = reply.Unit%3 + 1
			if other, err := modbus.AppendReplyRTU(nil, reply); err == nil {
				return append(out[:len(out)-len(bytes)], other...)
			}
		}
		return append(out, bytes...)
	}
}

// spoil damages a share of what is said: a bit turns, the end is lost, or
// bytes come that nobody sent.
func spoil(n noise, line, count int64, share float64, bytes []byte) []byte {
	s := ofGarbage + source(line)
	if n.uniform(s, 3*count) >= share {
		return bytes
	}
	r := n.bits(s, 3*count+1)
	out := append([]byte(nil), bytes...)
	at := int(r>>8) % len(out)
	switch r % 3 {
	case 0:
		out[at] ^= 1 << (r >> 40 & 7)
	case 1:
		out = out[:at]
	default:
		junk := []byte{byte(r >> 16), byte(r >> 24), byte(r >> 32)}
		out = append(out[:at], append(junk, out[at:]...)...)
	}
	return out
}
