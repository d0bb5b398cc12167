package live

import (
	"time"

	"barline/model/bench"
	"barline/model/drift"
	"barline/model/emission"
	"barline/model/reading"
	"barline/model/trend"
	"barline/model/unit"
)

// Mode is what the core is doing with the gas.
type Mode uint8

const (
	// Watching: nothing moves gas and nothing may, until armed.
	Watching Mode = iota
	// Armed: a command that moves gas would be taken.
	Armed
	// Ramping: the setpoint is on its way to the target.
	Ramping
	// Settling: the setpoint stands at the target, the gas follows.
	Settling
	// Isolated: inlet, pump and vent are shut and the pressure is watched.
	Isolated
	// Steady: nothing is under way, the controller keeps the setpoint.
	Steady
	// Held: HOLD was asked for or came by itself. Nothing resumes by itself.
	Held
)

var modeText = [...]string{"watching", "armed", "ramping", "settling", "isolated", "steady", "HOLD"}

// String returns the mode as the screen and the logbook write it.
func (m Mode) String() string { return modeText[m] }

// LinkHealth is the state of the line to one instrument.
type LinkHealth struct {
	Instrument string
	Up         bool
	Since      reading.Stamp
	Reason     string // why it is down
}

// Fare is how an instrument has fared since the start.
type Fare struct {
	Instrument string
	Good, Bad  uint64        // readings; a function check is neither
	Asked      uint64        // questions; 0 where it talks by itself
	Silent     uint64        // questions without an answer in time
	Refused    uint64        // answers and lines that were damaged or of another question
	Resynced   uint64        // times that it was asked again to be sure of its answers
	Stray      uint64        // bytes that nobody had asked for
	RoundTrip  time.Duration // mean, wall time; 0 where it talks by itself
	Slowest    time.Duration
	Worst      string // what was last wrong with a reading, and of which channel
}

// Alarm is one entry of the alarm list.
type Alarm struct {
	Name        string // such as "cell A stale"
	Priority    int    // 1 is the most urgent
	State       string // as ISA-18.2 names it
	Active      bool   // the condition holds now
	Acked       bool
	Hidden      bool // shelved, suppressed by design or out of service
	Since       reading.Stamp
	Cause       string // what happened
	Consequence string // what the bench does now
	Action      string // what to press or check
}

// Point is one measured emission and the pressure it was taken at.
type Point struct {
	At       reading.Stamp
	Pressure unit.Pascal // in the core
	Emission unit.Metre
	Rising   bool // pressure was rising towards this point
}

// Mark is a moment worth a sign beside a history: a note, an alarm, a command
// or a step.
type Mark struct {
	At   time.Duration // bench Mono
	Kind Kind
}

// Line is one record as a screen lists it.
type Line struct {
	At   reading.Stamp
	Kind Kind
	Text string
}

// Span is a stretch of wavelengths in vacuum.
type Span struct{ From, To unit.Metre }

// DriftView is what a screen shows of the drift of the light.
type DriftView struct {
	Watched  bool          // the bench file asks for it
	Since    reading.Stamp // when the bench came to rest at this pressure
	Learnt   bool          // what is quiet here is known
	Why      string        // why it is not, after an attempt
	Standing bool
	By       drift.Observable // what moved most
	Changed  reading.Stamp    // since when
	RunsAway bool             // it never stood still
	Text     string
	Tracks   [drift.ObservableCount]drift.Track // zero where nothing is known
	Decay    drift.Line                         // of a shut volume, Pa and Pa/s; zero where not known
	Findings []drift.Finding                    // most probable first
	Alike    map[string][]string                // that cannot be told apart from here
	Steps    []NextStep                         // that would tell, best first
	Taken    int                                // steps that were taken
}

// Snapshot is all that a screen draws. It is built by the loop, never changed
// afterwards, and shares no memory with the core.
type Snapshot struct {
	Now   reading.Stamp
	Bench *bench.Bench // read only

	Mode       Mode
	Why        string // why the bench is held, or what it waits for
	Notice     string // what became of the last intent
	ArmedUntil time.Duration
	// Acknowledged are the cautions that stand acknowledged.
	Acknowledged []Caution
	Target       unit.Pascal // 0 where there is none
	Setpoint     unit.Pascal // last commanded, 0 before the first
	Core         unit.Pascal // pressure at the point of compression as the model has it
	CoreKnown    bool
	Profile      []unit.Pascal // along the core from cell A to cell B; empty where not known
	CellsAir     unit.Fraction // residual air in the cells, by what was let in and out
	CoreAir      unit.Fraction // and in the core, as the prediction has it
	// Differential is by how much the core exceeds the holes of the cladding;
	// 0 where none are configured.
	Differential unit.Pascal
	Lag          unit.Pascal   // of the core behind the cells, positive where it has yet to rise
	ArriveIn     time.Duration // until the cells are at the target and the core has followed; 0 where not known
	SettleIn     time.Duration // until the core has caught up, if the cells stay as they are
	Program      Progress
	Outcome      Outcome // of the last program
	// Unfinished is a program of an earlier session that never ended; nil
	// where there is none.
	Unfinished *Unfinished

	Latest     [reading.RoleCount]reading.Reading
	Prediction emission.Prediction
	// Nodes of NodesPlanned full-field runs stand behind the anchored answer.
	Nodes, NodesPlanned int
	// Residual is measured minus predicted emission; valid where ResidualKnown.
	Residual      unit.Metre
	ResidualKnown bool

	Spectrum    *reading.Spectrum // the newest measured; nil where none was sent
	Propagated  *Propagated       // the newest full-field run of what was in the core; nil before the first
	Propagation Propagation       // how the next one fares

	Curve  []emission.CurvePoint // ascending in pressure
	Points []Point               // oldest first
	// Resonances are where the fibre's wall keeps it from guiding, margins
	// included; longest wavelengths first.
	Resonances []Span
	// CalibratedFrom and CalibratedTo are the lowest and highest pressure at
	// which the calibration in use was measured; both are 0 without one.
	CalibratedFrom, CalibratedTo unit.Pascal

	Links  []LinkHealth
	Fares  []Fare  // of the instruments, in the order of the bench file
	Alarms []Alarm // most urgent first
	Record RecordHealth
	Folder string // where the logbook is
	Recent []Line // newest last: lines of the record

	// History; times are bench Mono.
	PressureA *trend.View // Pa
	Expected  *trend.View // Pa: setpoint
	Residuals *trend.View // m

	// Trends is the history of every role that is measured, in its SI unit;
	// a view may be a second older than the rest.
	Trends [reading.RoleCount]*trend.View
	Rows   []StepData // of the runs of steps since the start, oldest first
	Marks  []Mark     // what happened meanwhile, oldest first

	Calibrations Calibrations
	Drift        DriftView
	// DriftPoints are the group means of each observable's chart, oldest first.
	DriftPoints [drift.ObservableCount][]drift.Point

	Simulated bool
	ReadOnly  bool
	// Replay says how a record is being played back, such as "10 × life": nothing
	// shown is happening now. It is empty where it is.
	Replay  string
	Dropped uint64 // readings that a full queue refused
}
