package live

import (
	"time"

	"barline/model/alarm"
	"barline/model/emission"
	"barline/model/flow"
	"barline/model/limit"
	"barline/model/reading"
	"barline/model/unit"
)

// MaxLinks bounds the instruments of one bench.
const MaxLinks = 16

// State is the experiment at one instant. It holds no pointer into memory
// that a step changes: a copy is a picture of that instant.
type State struct {
	Now reading.Stamp

	Latest [reading.RoleCount]reading.Reading // as reported; see Reading

	Mode       Mode
	Why        string        // why the bench is held, or what it waits for
	Notice     string        // what became of the last intent, for the screen
	ArmedUntil time.Duration // bench Mono; 0 where not armed

	Target   unit.Pascal
	Setpoint unit.Pascal // last commanded

	Core      unit.Pascal // in the core, where the pulse is shortest
	CoreKnown bool
	// Differential is by how much the core exceeds the holes of the cladding
	// where the pulse is shortest; 0 where none are configured.
	Differential unit.Pascal
	Lag          unit.Pascal   // of the core behind the cells, positive where it has yet to rise
	SettleIn     time.Duration // until the core has caught up, if the cells stay as they are
	Prediction   emission.Prediction
	Residual     unit.Metre // measured minus predicted emission
	// ResidualAt is when the emission behind Residual was taken; 0 where
	// there is none yet.
	ResidualAt time.Duration

	Links     [MaxLinks]LinkHealth
	LinkCount int
	Record    RecordHealth

	model        Predictor // asked instead of the core's own where it is not nil
	nodes        int
	nodesPlanned int

	// staleBy is the age beyond which a reading of a role is a failure, where
	// its channel says so itself; 0 where that of the bench holds. For a
	// pressure it can only be shorter than that: ramps lean on it.
	staleBy [reading.RoleCount]time.Duration

	lastGood [2]reading.Reading // of cells A and B: the last ones that could be used

	alarms alarm.List
	litAt  time.Duration // when an input last said that the light came back

	aside  aside
	hand   [limit.ValveCount]byHand
	shifts [maxShifts]zeroed

	heldByItself bool // HOLD came without being asked for
	refused      bool // an instrument did not take the last command
	following    bool // another core decides, see Told
	understood   [cautionCount]bool
	engaged      bool // the last command was a setpoint, and no HOLD came after it

	drift             drifting
	calibrating       calibrating
	run               progress
	tuning            tuning
	energy            unit.Joule // of a pulse, as a person confirmed it; 0 before
	outcome           Outcome
	forecast          flow.Forecast // of the move under way, where forecasting
	forecasting       bool
	flow              flow.State
	cladding          *flow.State // of one hole; nil where none is known. Never changed
	residue           flow.Residue
	flowAt            time.Duration
	lagAt             time.Duration
	command           uint64        // number of the last command sent
	awaiting          uint64        // number of the command whose answer is due; 0 where none
	awaitFrom         time.Duration // when it was sent
	rampedAt          time.Duration // when the setpoint last moved
	nearSince         time.Duration // since when the pressure has been at the target; 0 where it is not
	nearLow, nearHigh float64       // Pa, of cell A since then
	heldAt            time.Duration // when HOLD last came; 0 before the first
	predicted         time.Duration // when the model was last asked
	recorded          struct {      // the prediction that last went into the record
		at       time.Duration
		emission unit.Metre
	}
}

// Reading returns the newest reading of a role, with the status that it
// deserves now: one older than stale, or than its channel allows, is a failure.
func (s *State) Reading(r reading.Role, stale time.Duration) reading.Reading {
	got := s.Latest[r]
	if got.Channel == "" {
		got.Reason = "no reading yet"
		return got
	}
	if own := s.staleBy[r]; own > 0 && (own < stale || !r.IsPressure()) {
		stale = own
	}
	if age := s.Now.Mono - got.Taken.Mono; age > stale && got.Status != reading.Failure {
		got.Status, got.Reason = reading.Failure, "stale"
	}
	return got
}

// ArriveIn returns how long until the cells are at the target and the core has
// followed, by the model as corrected by what is seen; ok is false where no
// move is under way or it cannot be said.
func (s *State) ArriveIn() (wait time.Duration, ok bool) {
	if !s.forecasting || s.Mode != Ramping && s.Mode != Settling {
		return 0, false
	}
	return s.forecast.Left(s.SettleIn)
}
