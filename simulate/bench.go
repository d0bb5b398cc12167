package simulate

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"sync"
	"time"

	"barline/model/unit"
	"barline/simulate/panel"
)

// Frame is the bench's smallest unit of time.
const Frame = 20 * time.Millisecond

const frameSec = float64(Frame) / float64(time.Second)

// Options say which bench stands at the other end.
type Options struct {
	Seed     uint64
	Scenario string      // a name of Scenarios; empty is "fill"
	Pressure unit.Pascal // in cells and core at the start; 0: as the scenario has it
	Faults   []Timed     // besides those of the scenario
}

// Bench is Heron at one instant. It is safe for concurrent use; it starts no
// goroutine.
type Bench struct {
	mu    sync.Mutex
	noise noise
	truth Truth
	story Scenario

	frame  int64         // frames since the start
	asked  time.Duration // latest time that Advance was called with
	failed error         // why the physics stopped, if it did

	gas        gasPanel
	controller controller
	gaugeA     transducer
	gaugeB     transducer
	sensor     transducer // the controller's own, on the manifold
	fibreT     thermometer
	roomT      thermometer
	room       float64 // K
	fibre      float64 // K
	energy     float64 // J, in the fibre, this frame
	drift      float64 // slow part of the energy, relative
	light      *Light
	laser      laser
	spectro    spectrometer
	faults     faults

	ports   map[string]*port
	clock   func() time.Duration // bench time to catch up with; nil: Advance alone
	waits   bool                 // the clock runs by itself
	serving sync.WaitGroup
}

// New returns a bench at time zero: clean, still, valves shut but for those of
// the cells, the controller holding.
func New(o Options) (*Bench, error) {
	name := o.Scenario
	if name == "" {
		name = "fill"
	}
	story, err := findScenario(name)
	if err != nil {
		return nil, err
	}
	start := story.start
	if o.Pressure != 0 {
		start.P = float64(o.Pressure)
	}
	if !(start.P > 0) || start.P > cylinder {
		return nil, fmt.Errorf("start pressure %v: expected above 0 bar and below the cylinder's %v", o.Pressure, unit.Pascal(cylinder))
	}
	for _, f := range o.Faults {
		if f.Fault, err = f.Fault.checked(); err != nil {
			return nil, err
		}
		story.cues = append(story.cues, f)
	}
	slices.SortStableFunc(story.cues, func(a, b Timed) int { return cmp.Compare(a.At, b.At) })
	b := &Bench{
		noise: noise(o.Seed),
		truth: drawTruth(noise(o.Seed)),
		story: story,
		room:  roomTemperature,
		fibre: roomTemperature,
	}
	if b.gas, err = newGasPanel(start); err != nil {
		return nil, err
	}
	if b.light, err = NewLight(b.truth); err != nil {
		return nil, fmt.Errorf("light of the simulated bench: %w", err)
	}
	b.controller = newController(start.P)
	b.gaugeA = transducer{source: ofGaugeA, zero: float64(b.truth.ZeroA), span: float64(b.truth.SpanA), rms: 30, step: 10, value: start.P}
	b.gaugeB = transducer{source: ofGaugeB, zero: float64(b.truth.ZeroB), span: float64(b.truth.SpanB), rms: 30, step: 10, value: start.P}
	b.sensor = transducer{source: ofController, zero: 300 * b.noise.bounded(ofController, -1), rms: 60, step: 50, value: start.P}
	b.fibreT = thermometer{source: ofFibreThermometer, zero: 0.05 * b.noise.bounded(ofFibreThermometer, -1), value: b.fibre}
	b.roomT = thermometer{source: ofRoomThermometer, zero: 0.05 * b.noise.bounded(ofRoomThermometer, -1), value: b.room}
	b.laser = newLaser()
	b.ports = newPorts()
	b.beginFrame()
	return b, nil
}

// Scenario returns the story that the bench plays.
func (b *Bench) Scenario() Scenario { return b.story }

// Reveal tells the truth that the seed hid, for tests and for the end of a
// lesson.
func (b *Bench) Reveal() Truth { return b.truth }

// Openings returns how far inlet, vent and pump valve are truly open, 0 to 1,
// whatever the controller says on its line.
func (b *Bench) Openings() (inlet, vent, pump float64) {
	b.mu.Lock()
	defer b.mu.Unlock()
	v := &b.controller.valves
	return v[inletValve].opening, v[ventValve].opening, v[pumpValve].opening
}

// Now returns the bench time that the bench stands at.
func (b *Bench) Now() time.Duration {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.asked
}

// Advance carries the bench on to a bench time; one in the past is no error
// and changes nothing.
func (b *Bench) Advance(to time.Duration) error {
	b.mu.Lock()
	defer b.mu.Unlock()
	return b.advance(to)
}

func (b *Bench) advance(to time.Duration) error {
	b.asked = max(b.asked, to)
	for b.failed == nil && time.Duration(b.frame+1)*Frame <= b.asked {
		b.failed = b.step()
	}
	return b.failed
}

// step carries everything over one frame.
func (b *Bench) step() error {
	b.story.play(b)
	b.surroundings()
	b.controller.step(b.time(), b.sensor.read(b.noise, b.frame))
	b.gas.open(&b.controller, &b.faults)
	if err := b.gas.advance(b.fibre); err != nil {
		return fmt.Errorf("simulated bench at %v: %w", b.time(), err)
	}
	a, bb := b.gas.cell(0), b.gas.cell(1)
	b.gaugeA.follow(a.P, b.faults.zeroRate["cell A"])
	b.gaugeB.follow(bb.P, b.faults.zeroRate["cell B"])
	b.sensor.follow(b.gas.manifold().P, b.faults.zeroRate["controller"])
	b.fibreT.follow(b.fibre)
	b.roomT.follow(b.room)
	b.laser.move()
	b.frame++
	b.beginFrame()
	b.spectro.expose(b)
	return nil
}

func (b *Bench) beginFrame() {
	b.energy = pulseEnergy * (b.laser.share / halfWay) *
		(1 + float64(b.truth.Energy)) * (1 - b.faults.sag) *
		(1 + b.drift + 0.001*b.noise.normal(ofEnergy, b.frame))
}

// surroundings moves the room, the fibre's temperature and the laser.
func (b *Bench) surroundings() {
	const (
		airConditioning = 1400.0 // s, period
		fibreLag        = 200.0  // s
		laserLag        = 90.0   // s, correlation of its slow drift
		laserDrift      = 0.003
	)
	t := b.time().Seconds()
	phase := 2 * math.Pi * b.noise.uniform(ofRoom, 0)
	b.faults.grow(frameSec)
	b.room = roomTemperature + 0.12*(math.Sin(2*math.Pi*t/airConditioning+phase)-math.Sin(phase)) + b.faults.warmer
	b.fibre += (b.room - b.fibre) * frameSec / fibreLag
	b.gas.net.SetRoom(b.room)
	b.drift += -b.drift*frameSec/laserLag + laserDrift*math.Sqrt(2*frameSec/laserLag)*b.noise.normal(ofEnergyDrift, b.frame)
	b.gas.outgas(t)
}

func (b *Bench) time() time.Duration { return time.Duration(b.frame) * Frame }

// core returns the gas where the light is made: where the pulse was shortest
// when the spectrometer last looked.
func (b *Bench) core() panel.State { return b.gas.core.At(b.spectro.compression) }
