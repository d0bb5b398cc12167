package flow

import (
	"errors"
	"fmt"
	"math"
	"time"

	"barline/model/unit"
)

// Panel is a cell and what is open to it. Everything may be left zero: a valve
// without conductance is shut, a pump without speed is off.
type Panel struct {
	Cell

	Inlet  Regulator // gas from the cylinder, at Wall temperature
	Needle Valve     // behind the regulator
	// Vent lets gas out to Ambient, or air in.
	Vent    Valve
	Ambient unit.Pascal
	Pump    Pump

	// Leak is what comes in all the time, at Wall temperature.
	Leak unit.PascalCubicMetrePerSecond
	// Outgassing is the constant K of walls that give off Q = K/t, in Pa m³,
	// Age the time since they were last under pressure.
	Outgassing float64
	Age        time.Duration
}

// ErrNever is wrapped where a pressure will not be reached as the panel stands.
var ErrNever = errors.New("not reached as the valves stand")

const (
	panelTolerance = 2e-6
	panelHorizon   = 48 * time.Hour
	panelSteps     = 200000
)

// rates returns dn/dt in mol/s and d(nT)/dt in mol K/s:
//
//	dn/dt    = Σ ṅ_in − Σ ṅ_out
//	d(nT)/dt = γ(Σ ṅ_in·T_in − Σ ṅ_out·T) − (nT − nT_wall)/τ
//
// the mass and energy balance of an open vessel filled with a gas of constant
// heats: in comes enthalpy, what stays is energy.
func (p *Panel) rates(n, u, age float64) (dn, du float64) {
	t := p.Wall
	if n > 0 {
		t = unit.Kelvin(u / n)
	}
	at := p.Pressure(CellState{n, t})
	in := 0.0
	if p.Needle.Conductance > 0 {
		q, _ := p.Inlet.Through(p.Needle, p.Gas, p.Wall, at)
		in += q
	}
	out := 0.0
	if p.Vent.Conductance > 0 {
		if q := p.Vent.MolarFlow(p.Gas, at, t, p.Ambient, p.Wall); q > 0 {
			out += q
		} else {
			in -= q
		}
	}
	if p.Pump.Speed > 0 {
		out += p.Pump.MolarFlow(p.Gas, at, t)
	}
	walls := float64(p.Leak)
	if p.Outgassing > 0 {
		walls += p.Outgassing / max(age, 1)
	}
	in += walls / (GasConstant * float64(p.Wall))
	du = p.Gas.HeatRatio * (in*float64(p.Wall) - out*float64(t))
	dn = in - out
	if p.WallTime > 0 {
		du -= (u - n*float64(p.Wall)) / p.WallTime.Seconds()
	} else {
		du = dn * float64(p.Wall)
	}
	return dn, du
}

// Advance returns the state after dt, by steps that are each within 2e-6. Wide
// valves make the equations stiff; the method does not mind.
func (p *Panel) Advance(s CellState, dt time.Duration) (CellState, error) {
	if dt < 0 {
		return s, fmt.Errorf("step of %v: %w: time runs backwards", dt, ErrRange)
	}
	next, _, err := p.run(s, dt.Seconds(), nil)
	return next, err
}

// TimeTo returns how long it takes from s until the pressure reaches target
// and the state then. Where it never does (the valves shut, the pump at its
// ultimate pressure, the wrong direction), the error wraps ErrNever and says
// where the pressure stops.
func (p *Panel) TimeTo(s CellState, target unit.Pascal) (time.Duration, CellState, error) {
	if err := checkState(target, p.Wall); err != nil {
		return 0, s, err
	}
	from := p.Pressure(s)
	if from == target {
		return 0, s, nil
	}
	rising := target > from
	next, t, err := p.run(s, panelHorizon.Seconds(), func(s CellState) float64 {
		if rising {
			return float64(target - p.Pressure(s))
		}
		return float64(p.Pressure(s) - target)
	})
	if err != nil {
		return 0, s, err
	}
	if t >= panelHorizon.Seconds() {
		return 0, s, fmt.Errorf("pressure %v from %v: %w: it stays at %v", target, from, ErrNever, p.Pressure(next))
	}
	return time.Duration(t * 1e9), next, nil
}

// run carries s on by total seconds, or until left is zero.
func (p *Panel) run(s CellState, total float64, left func(CellState) float64) (CellState, float64, error) {
	if err := p.check(); err != nil {
		return s, 0, err
	}
	if !(s.Amount >= 0) || !(s.Temperature >= 0) || math.IsInf(s.Amount, 0) || math.IsInf(float64(s.Temperature), 0) {
		return s, 0, fmt.Errorf("cell with %v mol at %v K: %w", s.Amount, float64(s.Temperature), ErrRange)
	}
	n, u, t, age := s.Amount, s.Amount*float64(s.Temperature), 0.0, p.Age.Seconds()
	state := func(n, u float64) CellState {
		if n <= 0 {
			return CellState{0, p.Wall}
		}
		return CellState{n, unit.Kelvin(u / n)}
	}
	dt := min(total, 1e-3)
	for range panelSteps {
		if t >= total {
			return state(n, u), t, nil
		}
		dt = min(dt, total-t)
		n1, u1, ratio := p.step(n, u, age+t, dt)
		grow := min(5, max(0.2, 0.9/math.Cbrt(max(ratio, 1e-6))))
		if !(ratio <= 1) || n1 < 0 || u1 < 0 {
			if math.IsNaN(grow) {
				grow = 0.2
			}
			dt *= min(grow, 0.5)
			if !(dt > 1e-12) {
				return s, t, fmt.Errorf("cell at %v: no solution", p.Pressure(state(n, u)))
			}
			continue
		}
		if left != nil {
			// The step is short enough for a straight line within it.
			if was, is := left(state(n, u)), left(state(n1, u1)); is <= 0 {
				f := 1.0
				if was > is {
					f = was / (was - is)
				}
				return state(n+f*(n1-n), u+f*(u1-u)), t + f*dt, nil
			}
			if n1 == n && u1 == u {
				return state(n, u), total, nil // nothing moves any more
			}
		}
		n, u, t = n1, u1, t+dt
		dt *= grow
	}
	return s, t, fmt.Errorf("cell: no end after %d steps, at %v", panelSteps, time.Duration(t*1e9))
}

// step does one step of L.F. Shampine & M.W. Reichelt's second-order Rosenbrock
// method, SIAM J. Sci. Comput. 18, 1 (1997), ode23s, with a Jacobian by
// differences. It returns the new n and u and the estimated error, 1 being what
// is allowed.
func (p *Panel) step(n, u, age, dt float64) (n1, u1, ratio float64) {
	// A trace of gas is resolved too: a millionth of a millibar.
	floorN := 1e-4 * float64(p.Volume) / (GasConstant * float64(p.Wall))
	floorU := floorN * float64(p.Wall)
	fn, fu := p.rates(n, u, age)
	hn, hu := 1e-6*(n+floorN), 1e-6*(u+floorU)
	an, au := p.rates(n+hn, u, age)
	bn, bu := p.rates(n, u+hu, age)
	later, laterU := fn, fu
	ht := 1e-4 * (age + dt)
	if p.Outgassing > 0 {
		later, laterU = p.rates(n, u, age+ht)
	}
	const d, e32 = 1 / (2 + math.Sqrt2), 6 + math.Sqrt2
	tn, tu := dt*d*(later-fn)/ht, dt*d*(laterU-fu)/ht
	// W = 1 − dt·d·J, inverted by hand.
	g := dt * d
	w11, w12 := 1-g*(an-fn)/hn, -g*(bn-fn)/hu
	w21, w22 := -g*(au-fu)/hn, 1-g*(bu-fu)/hu
	det := w11*w22 - w12*w21
	solve := func(x, y float64) (float64, float64) { return (w22*x - w12*y) / det, (w11*y - w21*x) / det }
	k1n, k1u := solve(fn+tn, fu+tu)
	gn, gu := p.rates(n+0.5*dt*k1n, u+0.5*dt*k1u, age+0.5*dt)
	k2n, k2u := solve(gn-k1n, gu-k1u)
	k2n, k2u = k2n+k1n, k2u+k1u
	n1, u1 = n+dt*k2n, u+dt*k2u
	en, eu := p.rates(n1, u1, age+dt)
	k3n, k3u := solve(en-e32*(k2n-gn)-2*(k1n-fn)+tn, eu-e32*(k2u-gu)-2*(k1u-fu)+tu)
	ratio = max(dt/6*math.Abs(k1n-2*k2n+k3n)/(panelTolerance*(max(n, n1)+floorN)),
		dt/6*math.Abs(k1u-2*k2u+k3u)/(panelTolerance*(max(u, u1)+floorU)))
	return n1, u1, ratio
}
