package panel

import (
	"errors"
	"fmt"
)

// Node names a volume or a reservoir of a network.
type Node int

// Wall names a wall of a network.
type Wall int

// Passage names a passage of a network.
type Passage int

const perNode = 3 // moles of gas, moles of air, internal energy

// Network is volumes, walls, reservoirs and the passages between them. Build
// it with the Add methods, then Advance it. It is not safe for concurrent use.
type Network struct {
	heats

	volumes    []float64 // m³
	walls      []wall
	reservoirs []State
	passages   []passage
	contacts   []contact

	// Volumes × perNode; behind them what only counts: walls (J above 0 K),
	// reservoirs × perNode, room (J).
	y  []float64
	h  float64 // s, the step that the error control would take next
	ws workspace

	built bool
}

type wall struct {
	capacity float64 // J/K
	t        float64 // K, at the start of the present Advance
	to       float64 // W/K, to the room
	room     float64 // K
}

type passage struct {
	from, to Node
	law      Law
	opening  float64 // 0 … 1, a factor on the flow
	backward bool    // the upstream side of the present step is to
}

// contact is heat exchange between the gas in a volume and a wall.
type contact struct {
	volume Node
	wall   Wall
	still  float64 // W/K at vanishing convection
	moving float64 // W/K more at 10 bar, growing as the root of pressure
}

// heats are the molar heat capacities of the two species, J/(mol K).
type heats struct{ cv, cp [2]float64 }

// NewNetwork returns an empty network for a working gas.
func NewNetwork(g Gas) *Network {
	return &Network{heats: heats{cv: [2]float64{g.cv(), air.cv()}, cp: [2]float64{g.cp(), air.cp()}}}
}

// AddVolume adds a volume in m³ that stands at s.
func (n *Network) AddVolume(volume float64, s State) Node {
	n.volumes = append(n.volumes, volume)
	moles := s.P * volume / (R * s.T)
	g, a := moles*(1-s.Air), moles*s.Air
	n.y = append(n.y, g, a, (g*n.cv[0]+a*n.cv[1])*s.T)
	return Node(len(n.volumes) - 1)
}

// AddWall adds a wall of the given heat capacity in J/K that stands at the
// temperature of the room in K and is joined to it by conductance in W/K.
func (n *Network) AddWall(capacity, conductance, room float64) Wall {
	n.walls = append(n.walls, wall{capacity: capacity, to: conductance, room: room})
	return Wall(len(n.walls) - 1)
}

// AddReservoir adds a reservoir whose state is given from outside.
func (n *Network) AddReservoir(s State) Node {
	n.reservoirs = append(n.reservoirs, s)
	return Node(-len(n.reservoirs))
}

// AddPassage joins two nodes. It stands shut.
func (n *Network) AddPassage(from, to Node, law Law) Passage {
	n.passages = append(n.passages, passage{from: from, to: to, law: law})
	return Passage(len(n.passages) - 1)
}

// AddContact lets the gas of a volume exchange heat with a wall: still W/K by
// conduction, and moving·√(p/10 bar) W/K more by convection.
func (n *Network) AddContact(v Node, w Wall, still, moving float64) {
	n.contacts = append(n.contacts, contact{v, w, still, moving})
}

// Open sets how far a passage stands open, 0 to 1.
func (n *Network) Open(p Passage, opening float64) { n.passages[p].opening = min(max(opening, 0), 1) }

// SetLaw replaces the law of a passage, such as when a leak grows.
func (n *Network) SetLaw(p Passage, law Law) { n.passages[p].law = law }

// SetReservoir sets the state of a reservoir.
func (n *Network) SetReservoir(r Node, s State) { n.reservoirs[-r-1] = s }

// SetRoom sets the temperature of the room in K behind every wall.
func (n *Network) SetRoom(t float64) {
	for i := range n.walls {
		n.walls[i].room = t
	}
}

// State returns the state of a volume or a reservoir.
func (n *Network) State(v Node) State {
	if v < 0 {
		return n.reservoirs[-v-1]
	}
	return n.stateOf(n.y, v)
}

func (n *Network) stateOf(y []float64, v Node) State {
	i := int(v) * perNode
	g, a := y[i], y[i+1]
	moles := g + a
	t := y[i+2] / (g*n.cv[0] + a*n.cv[1])
	return State{P: moles * R * t / n.volumes[v], T: t, Air: a / moles}
}

// WallTemperature returns the temperature of a wall in K.
func (n *Network) WallTemperature(w Wall) float64 {
	if n.built {
		return n.y[n.wallAt(w)] / n.walls[w].capacity
	}
	return n.walls[w].room
}

// Moles returns what a volume holds, or what a reservoir has taken up since
// the start (negative where it has given), in mol of working gas and of air.
func (n *Network) Moles(v Node) (gas, air float64) {
	n.build()
	i := n.at(v)
	return n.y[i], n.y[i+1]
}

// Energy returns the internal energy of everything inside, plus what the
// reservoirs and the room took up, in J. It is constant in time.
func (n *Network) Energy() float64 {
	n.build()
	sum := 0.0
	for v := range n.volumes {
		sum += n.y[v*perNode+2]
	}
	for w := range n.walls {
		sum += n.y[n.wallAt(Wall(w))]
	}
	for r := range n.reservoirs {
		sum += n.y[n.at(Node(-r-1))+2]
	}
	return sum + n.y[n.roomAt()]
}

// Deposit adds moles to a volume from outside the network, such as from the
// fibre core, at temperature t in K. Negative moles are taken out, at the
// volume's own temperature.
func (n *Network) Deposit(v Node, gas, airMoles, t float64) {
	n.build()
	i := n.at(v)
	if gas+airMoles < 0 {
		t = n.State(v).T
	}
	n.y[i] += gas
	n.y[i+1] += airMoles
	n.y[i+2] += (gas*n.cp[0] + airMoles*n.cp[1]) * t
}

var errStep = errors.New("no step is small enough")

// Advance integrates over dt seconds with openings and reservoirs as they
// stand, to a relative error of some 1e-5. Walls count as standing at their
// temperature of the start, which is an error of first order in dt over their
// own time of minutes.
func (n *Network) Advance(dt float64) error {
	n.build()
	for i := range n.walls {
		w := &n.walls[i]
		w.t = n.y[n.wallAt(Wall(i))] / w.capacity
	}
	if err := n.integrate(dt); err != nil {
		return fmt.Errorf("panel: over %g s: %w", dt, err)
	}
	return nil
}

// build lays out the state vector once everything has been added.
func (n *Network) build() {
	if n.built {
		return
	}
	n.built = true
	for _, w := range n.walls {
		n.y = append(n.y, w.capacity*w.room)
	}
	n.y = append(n.y, make([]float64, perNode*len(n.reservoirs)+1)...)
	n.ws.size(len(n.y), n.inner())
}

// inner is how many components of y have a say in the rates; those behind it
// only count.
func (n *Network) inner() int { return perNode * len(n.volumes) }

func (n *Network) wallAt(w Wall) int { return n.inner() + int(w) }

// roomAt is the heat that the room took up from the walls.
func (n *Network) roomAt() int { return len(n.y) - 1 }

func (n *Network) at(v Node) int {
	if v < 0 {
		return n.inner() + len(n.walls) + perNode*int(-v-1)
	}
	return perNode * int(v)
}
