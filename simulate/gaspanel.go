package simulate

import "barline/simulate/panel"

// gasPanel is Heron's gas path: cylinder, regulator, line, needle and inlet
// valve, manifold with pump, vent and relief valve, two cells behind valves of
// their own, and the core between them.
type gasPanel struct {
	net  *panel.Network
	core *panel.Core

	line, hub panel.Node
	cells     [2]panel.Node

	cylinder, room, exhaust panel.Node

	inlet, vent, pump panel.Passage
	regulator         panel.Passage
	cellValves        [2]panel.Passage
	leaks             map[string]panel.Passage
	gassing           [2]panel.Passage

	ends [2]panel.State // of the core, at the last frame
}

func newGasPanel(start panel.State) (gasPanel, error) {
	argon := panel.Argon()
	net := panel.NewNetwork(argon)
	g := gasPanel{net: net}
	g.line = net.AddVolume(lineVolume, panel.State{P: supply, T: start.T})
	g.hub = net.AddVolume(manifoldVolume, start)
	g.cells = [2]panel.Node{net.AddVolume(cellVolume, start), net.AddVolume(cellVolume, start)}
	for _, w := range []struct {
		capacity, room float64
		of             []panel.Node
		still, moving  float64
	}{
		{150, 0.3, []panel.Node{g.line, g.hub}, 0.02, 0.05},
		{500, 0.5, g.cells[:1], 0.03, 0.07},
		{500, 0.5, g.cells[1:], 0.03, 0.07},
	} {
		wall := net.AddWall(w.capacity, w.room, start.T)
		for _, v := range w.of {
			net.AddContact(v, wall, w.still, w.moving)
		}
	}
	g.cylinder = net.AddReservoir(panel.State{P: cylinder, T: start.T})
	g.room = net.AddReservoir(panel.State{P: ambient, T: start.T, Air: 1})
	g.exhaust = net.AddReservoir(panel.State{P: ambient, T: start.T, Air: 1})

	g.regulator = net.AddPassage(g.cylinder, g.line, panel.Regulator{Setting: supply, Slope: regulatorSlope})
	net.Open(g.regulator, 1)
	g.inlet = net.AddPassage(g.line, g.hub, panel.NewOrifice(needleConductance, argon))
	g.vent = net.AddPassage(g.hub, g.room, panel.NewOrifice(ventConductance, argon))
	g.pump = net.AddPassage(g.hub, g.exhaust, panel.Pump{Speed: pumpSpeed, Ultimate: pumpUltimate})
	relief := panel.Relief{Setting: reliefSetting, Orifice: panel.NewOrifice(reliefConductance, argon)}
	net.Open(net.AddPassage(g.hub, g.room, relief), 1)
	for i, c := range g.cells {
		g.cellValves[i] = net.AddPassage(g.hub, c, panel.NewOrifice(cellValveConductance, argon))
		g.gassing[i] = net.AddPassage(g.room, c, panel.Source{})
		net.Open(g.gassing[i], 1)
	}
	g.leaks = map[string]panel.Passage{}
	for i, v := range []panel.Node{g.cells[0], g.cells[1], g.hub} { // in one order: sums round by it
		where := [...]string{"cell A", "cell B", "manifold"}[i]
		g.leaks[where] = net.AddPassage(v, g.room, panel.NewOrifice(0, argon))
	}
	core, err := panel.NewCore(argon, fibreRadius, fibreLength, coreCells, start)
	if err != nil {
		return g, err
	}
	g.core = core
	g.ends = [2]panel.State{start, start}
	return g, nil
}

func (g *gasPanel) manifold() panel.State  { return g.net.State(g.hub) }
func (g *gasPanel) cell(i int) panel.State { return g.net.State(g.cells[i]) }

// leak sets the sonic conductance of the leak at a place, m³/(s Pa).
func (g *gasPanel) leak(where string, conductance float64) {
	p := g.leaks[where]
	g.net.SetLaw(p, panel.NewOrifice(conductance, panel.Argon()))
	g.net.Open(p, 1)
}

// regulate sets what the regulator gives, Pa.
func (g *gasPanel) regulate(setting float64) {
	g.net.SetLaw(g.regulator, panel.Regulator{Setting: setting, Slope: regulatorSlope})
}

// taint sets the mole fraction of air in what the cylinder gives.
func (g *gasPanel) taint(air float64) {
	s := g.net.State(g.cylinder)
	s.Air = air
	g.net.SetReservoir(g.cylinder, s)
}

// outgas sets what the walls give off at t seconds; they stood open to air an
// hour before the start.
func (g *gasPanel) outgas(t float64) {
	const hour = 3600
	rate := outgassing / (panel.R * roomTemperature) * hour / (t + hour)
	for _, p := range g.gassing {
		g.net.SetLaw(p, panel.Source{Rate: rate})
	}
}

// open puts the valves where the controller and the faults have them.
func (g *gasPanel) open(c *controller, f *faults) {
	for i, v := range []struct {
		name    string
		passage panel.Passage
	}{
		{"inlet", g.inlet}, {"vent", g.vent}, {"pump", g.pump},
		{"cell A", g.cellValves[0]}, {"cell B", g.cellValves[1]},
	} {
		if !f.stuck[v.name] {
			c.valves[i].move()
		}
		g.net.Open(v.passage, c.valves[i].opening)
	}
}

// advance carries the gas over one frame, the fibre at t kelvin.
func (g *gasPanel) advance(t float64) error {
	if err := g.net.Advance(frameSec); err != nil {
		return err
	}
	ends := [2]panel.State{g.cell(0), g.cell(1)}
	out, err := g.core.Advance(frameSec, t, g.ends, ends)
	if err != nil {
		return err
	}
	for i, v := range g.cells {
		g.net.Deposit(v, out.Gas[i], out.Air[i], t)
	}
	g.ends = ends
	return nil
}
