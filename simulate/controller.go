package simulate

import (
	"math"
	"time"
)

// Valves of the controller, in the order of controller.valves.
const (
	inletValve = iota
	ventValve
	pumpValve
	cellAValve
	cellBValve
	valveCount
)

// valve is the moving part of one valve.
type valve struct {
	target  float64 // 0 … 1
	opening float64
}

// move carries the valve over one frame: a proportional valve follows its coil
// in some tens of milliseconds.
func (v *valve) move() {
	const lag = 0.05 // s
	v.opening += (v.target - v.opening) * min(1, frameSec/lag)
	if math.Abs(v.opening-v.target) < 1e-3 {
		v.opening = v.target
	}
}

// controller is the pressure controller: a sensor on the manifold, a loop, and
// the valves. It lets gas in through the inlet and out through the vent, and
// through the pump below 1.2 bar. A setpoint of 5 mbar or less, where its
// sensor says little, means pumping: the pump valve stays open.
//
// In hold the loop stands still and inlet, vent and pump are shut. A setpoint
// makes it control again, but for one that comes within three seconds after
// the hold: that is stored and moves nothing, so that freezing the setpoint
// does not restart the loop.
type controller struct {
	setpoint  float64 // Pa
	holding   bool
	heldAt    time.Duration
	heard     time.Duration // when the last message came
	watchdog  time.Duration // silence after which it holds; 0: never
	tripped   bool          // the watchdog held, and nobody has asked since
	integral  float64       // bar/s
	pumping   bool
	valves    [valveCount]valve
	pressure  float64 // Pa, as its sensor last said
	restraint time.Duration
}

func newController(pressure float64) controller {
	c := controller{setpoint: pressure, pressure: pressure, holding: true, heldAt: -time.Hour, restraint: 3 * time.Second}
	for _, i := range []int{cellAValve, cellBValve} {
		c.valves[i] = valve{1, 1}
	}
	return c
}

// aim takes a setpoint in Pa.
func (c *controller) aim(now time.Duration, pressure float64) {
	c.setpoint = pressure
	if c.holding && now-c.heldAt < c.restraint {
		return
	}
	c.control()
}

func (c *controller) control() {
	if c.holding {
		c.holding, c.tripped, c.integral = false, false, 0
	}
}

func (c *controller) hold(now time.Duration) {
	c.holding, c.heldAt = true, now
	c.pumping = false
	for _, i := range []int{inletValve, ventValve, pumpValve} {
		c.valves[i].target = 0
	}
}

// step runs the loop once on a new sensor value in Pa.
func (c *controller) step(now time.Duration, pressure float64) {
	const (
		perSecond    = 2.5   // bar/s for each bar away
		integralGain = 0.4   // bar/s for each bar s
		near         = 0.1   // bar, where the integral works
		deadband     = 0.002 // bar, within which every valve stays shut
		hysteresis   = 0.02  // bar
		vacuum       = 0.005 // bar
	)
	c.pressure = pressure
	if c.watchdog > 0 && !c.holding && now-c.heard > c.watchdog {
		c.hold(now)
		c.tripped = true
	}
	if c.holding {
		return
	}
	p := pressure / bar
	away := c.setpoint/bar - p
	if math.Abs(away) < near {
		c.integral = min(max(c.integral+integralGain*away*frameSec, -0.02), 0.02)
	} else {
		c.integral = 0
	}
	rate := perSecond*away + c.integral // bar/s wanted
	switch {
	case c.setpoint <= vacuum*bar && p < 4*vacuum:
		rate = -1
	case math.Abs(away) < deadband:
		rate = 0
	}
	// How fast each valve, wide open, moves the pressure, bar/s: set when the
	// loop was tuned.
	inlet, vent, pump := 0.0, 0.0, 0.0
	switch {
	case rate > 0:
		inlet = rate / 1.0
	case rate < 0:
		c.pumping = p < pumpBelow/bar-hysteresis || c.pumping && p < pumpBelow/bar
		if c.pumping {
			pump = -rate / max(0.7*p, 1e-4)
		} else {
			vent = -rate / (0.26 * p)
		}
	}
	c.drive(inletValve, inlet)
	c.drive(ventValve, vent)
	c.drive(pumpValve, pump)
}

// drive moves one of inlet, vent and pump, which opens only when the other two
// are shut: no two of supply, room and pump are ever joined.
func (c *controller) drive(i int, opening float64) {
	for _, other := range []int{inletValve, ventValve, pumpValve} {
		if other != i && c.valves[other].opening > 0 {
			opening = 0
		}
	}
	c.valves[i].target = min(opening, 1)
}
