package simulate

import (
	"fmt"
	"slices"
	"strings"

	"barline/simulate/panel"
)

// Kind is a way in which a bench goes wrong. About says what each is.
type Kind uint8

const (
	Leak Kind = iota
	Air
	Stuck
	Zero
	Sag
	Warm
	Dead
	Garbage
	Confused
	Unplugged
	Shutter
	Supply
	kindCount
)

var places = [kindCount][]string{
	Leak:      {"cell B", "cell A", "manifold"},
	Air:       {"supply"},
	Stuck:     {"inlet", "vent", "pump", "cell A", "cell B"},
	Zero:      {"cell B", "cell A", "controller"},
	Sag:       {"laser"},
	Warm:      {"room"},
	Dead:      {"cell A", "cell B", "fibre", "controller", "spectrometer"},
	Garbage:   {"gauges", "controller", "spectrometer"},
	Confused:  {"gauges", "controller"},
	Unplugged: {"controller", "gauges", "spectrometer"},
	Shutter:   {"laser"},
	Supply:    {"regulator"},
}

var kinds = [kindCount]struct {
	name  string
	size  float64 // what a size of zero means
	about string
}{
	Leak:      {"leak", 0.05, "gas to the room, air from it below ambient; size in mbar L/s of argon at 10 bar"},
	Air:       {"air", 0.02, "air in the cylinder's gas; size as a mole fraction"},
	Stuck:     {"stuck", 0, "a valve stays where it is"},
	Zero:      {"zero", 100, "the zero of a transducer creeps; size in mbar an hour"},
	Sag:       {"sag", 0.15, "pulse energy falls; size as a share an hour"},
	Warm:      {"warm", 3, "the room warms; size in K an hour"},
	Dead:      {"dead", 0, "a sensor or an instrument says nothing any more"},
	Garbage:   {"garbage", 0.1, "noise on a line; size as the share of replies hit"},
	Confused:  {"confused", 0.1, "replies come late or twice, behind an echo or from another unit; size as the share of replies"},
	Unplugged: {"unplugged", 0, "a cable is pulled"},
	Shutter:   {"shutter", 0, "the shutter is closed"},
	Supply:    {"supply", 40, "the regulator fails and gives more than it was set to; size in bar more"},
}

// Kinds returns all kinds of fault.
func Kinds() []Kind {
	all := make([]Kind, kindCount)
	for i := range all {
		all[i] = Kind(i)
	}
	return all
}

// About says in one line what the fault is and what its size means.
func (k Kind) About() string {
	if k < kindCount {
		return kinds[k].about
	}
	return ""
}

// String returns the kind's name.
func (k Kind) String() string {
	if k < kindCount {
		return kinds[k].name
	}
	return fmt.Sprintf("fault %d", uint8(k))
}

// Fault is something that goes wrong, or is put right again.
type Fault struct {
	Kind  Kind
	Where string  // empty: the first place of Places
	Size  float64 // as About says; 0: an ordinary size
	Over  bool    // it ends: repaired, cleaned, plugged in again
}

// Places returns where a fault of this kind can be. The first is where it is
// unless somebody says otherwise.
func (k Kind) Places() []string {
	if k >= kindCount {
		return nil
	}
	return slices.Clone(places[k])
}

// faults are those that stand at present.
type faults struct {
	stuck     map[string]bool
	dead      map[string]bool
	unplugged map[string]bool
	garbage   map[string]float64
	confused  map[string]float64
	zeroRate  map[string]float64 // Pa/s

	sag, sagRate     float64 // share, 1/s
	warmer, warmRate float64 // K, K/s
	shutter          bool
}

// grow carries the slow faults over dt seconds.
func (f *faults) grow(dt float64) {
	f.sag = min(f.sag+f.sagRate*dt, 0.95)
	f.warmer += f.warmRate * dt
}

// Inject lets a fault begin, or end where it is Over. It takes effect with the
// next frame. Energy that sagged comes back at once when it is over; a zero
// that crept and a room that warmed stay where they are.
func (b *Bench) Inject(f Fault) error {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.inject(f)
}

// checked fills in what f leaves open, or says what is wrong with it.
func (f Fault) checked() (Fault, error) {
	if f.Kind >= kindCount {
		return f, fmt.Errorf("%v: no such fault", f.Kind)
	}
	if f.Where == "" {
		f.Where = places[f.Kind][0]
	}
	if !slices.Contains(places[f.Kind], f.Where) {
		return f, fmt.Errorf("fault %v at %q: expected %s", f.Kind, f.Where, strings.Join(places[f.Kind], ", "))
	}
	if !(f.Size > -1e6 && f.Size < 1e6) {
		return f, fmt.Errorf("fault %v of size %g: expected a number of ordinary size", f.Kind, f.Size)
	}
	return f, nil
}

func (b *Bench) inject(f Fault) error {
	f, err := f.checked()
	if err != nil {
		return err
	}
	if f.Size == 0 {
		f.Size = kinds[f.Kind].size
	}
	if f.Over {
		f.Size = 0
	}
	const hour = 3600
	switch s := &b.faults; f.Kind {
	case Leak:
		const throughput = 0.1 // Pa m³/s of 1 mbar L/s
		b.gas.leak(f.Where, max(f.Size, 0)*throughput/(panel.Argon().FlowFactor()*10*bar*panel.ReferencePressure))
	case Air:
		b.gas.taint(min(max(f.Size, 0), 1))
	case Stuck:
		mark(&s.stuck, f.Where, !f.Over)
	case Zero:
		mark(&s.zeroRate, f.Where, f.Size*100/hour)
	case Sag:
		s.sagRate = f.Size / hour
		if f.Over {
			s.sag = 0
		}
	case Warm:
		s.warmRate = f.Size / hour
	case Dead:
		mark(&s.dead, f.Where, !f.Over)
	case Garbage:
		mark(&s.garbage, f.Where, min(max(f.Size, 0), 1))
	case Confused:
		mark(&s.confused, f.Where, min(max(f.Size, 0), 1))
	case Unplugged:
		mark(&s.unplugged, f.Where, !f.Over)
		if p := b.ports[f.Where]; p != nil && !f.Over {
			p.in, p.out = nil, nil
		}
	case Shutter:
		s.shutter = !f.Over
	case Supply:
		b.gas.regulate(supply + max(f.Size, 0)*bar)
	}
	return nil
}

func mark[V any](m *map[string]V, where string, v V) {
	if *m == nil {
		*m = map[string]V{}
	}
	(*m)[where] = v
}
