package live

import (
	"fmt"
	"slices"

	"barline/model/calibration"
	"barline/model/emission"
	"barline/model/reading"
)

// Calibrated is a Predictor over which a calibration can be laid. It refuses
// one that was made on another bench, and any while it has nothing to lay it
// over.
type Calibrated interface {
	Calibrated(c *calibration.Calibration) (Predictor, error)
}

// Calibrate asks for a calibration on the last scan; Adopt uses one that is
// known from now on, and Revert goes back to the one that was in use before,
// or to the bench file.
type (
	Calibrate struct{}
	Adopt     struct{ Name string }
	Revert    struct{}
)

func (Calibrate) intent() {}
func (Adopt) intent()     {}
func (Revert) intent()    {}

// Fit asks for a calibration on the rows of the last scan. The answer comes
// back as Fitted.
type Fit struct{}

// Keep asks that a calibration be kept where the next start finds it, and
// which one is in use.
type Keep struct {
	New     *calibration.Calibration // nil: none is new
	InUse   string                   // empty: the bench file
	Earlier []string                 // those in use before, newest last
}

func (Fit) effect()  {}
func (Keep) effect() {}

// Fitted is the answer to Fit.
type Fitted struct {
	At          reading.Stamp
	Calibration *calibration.Calibration
	Err         string // why there is none
}

// CalibrationsFound brings what an earlier run has kept.
type CalibrationsFound struct {
	At      reading.Stamp
	Known   []*calibration.Calibration
	InUse   string
	Earlier []string
	Note    string // trouble in finding them
}

// When implements Event.
func (e Fitted) When() reading.Stamp            { return e.At }
func (e CalibrationsFound) When() reading.Stamp { return e.At }

// CalibrationData is what became of a calibration. Of the bench file, which
// corrects nothing, there is no calibration.
type CalibrationData struct {
	Action   string `json:"action"` // fitted | adopted | reverted | in use
	Replaces string `json:"replaces,omitempty"`
	*calibration.Calibration
}

// String returns it in words.
func (d CalibrationData) String() string {
	action := d.Action
	if action == "" {
		action = "fitted" // as earlier records have it
	}
	if d.Calibration == nil {
		return action + ": the bench file, without a calibration"
	}
	return fmt.Sprintf("%s: %s, %s", action, d.Name, d.Calibration.Summary())
}

// calibrating is what is known of calibrations.
type calibrating struct {
	known   []*calibration.Calibration // never changed in place
	inUse   *calibration.Calibration   // nil: the bench file
	earlier []string                   // names in use before, newest last; never changed in place
	fitting bool
	laid    Predictor // the model with inUse laid over; nil where there is none
	why     string    // why inUse is not laid over yet
}

// mostEarlier bounds how far back Revert goes.
const mostEarlier = 16

// lay lays the calibration in use over the model of now.
func (c *Core) lay(s *State) {
	k := &s.calibrating
	k.laid, k.why = nil, ""
	if k.inUse == nil {
		return
	}
	model := c.predictor
	if s.model != nil {
		model = s.model
	}
	over, ok := model.(Calibrated)
	if !ok {
		k.why = "the predictions of this program take no calibration"
		return
	}
	laid, err := over.Calibrated(k.inUse)
	if err != nil {
		k.why = err.Error()
		return
	}
	k.laid = laid
}

// use takes a calibration into use, or the bench file where it is nil.
func (c *Core) use(s *State, use *calibration.Calibration) {
	was := s.Prediction
	s.calibrating.inUse = use
	c.lay(s)
	c.rebase(s, was)
	s.Prediction, s.predicted, s.recorded.at = emission.Prediction{}, 0, 0
}

func (k *calibrating) find(name string) *calibration.Calibration {
	for _, c := range k.known {
		if c.Name == name {
			return c
		}
	}
	return nil
}

func nameOf(c *calibration.Calibration) string {
	if c == nil {
		return ""
	}
	return c.Name
}

// adopt carries out Adopt.
func (c *Core) adopt(s *State, name string, fx []Effect) ([]Effect, error) {
	k := &s.calibrating
	next := k.find(name)
	switch {
	case next == nil:
		return fx, fmt.Errorf("no calibration is called %q", name)
	case k.inUse != nil && k.inUse.Name == name:
		return fx, fmt.Errorf("calibration %q is in use already", name)
	}
	was := nameOf(k.inUse)
	earlier := append(slices.Clone(k.earlier), was)
	k.earlier = earlier[max(0, len(earlier)-mostEarlier):]
	c.use(s, next)
	s.Notice = "in use: " + name
	if k.why != "" {
		s.Notice += "; not yet: " + k.why
	}
	return c.keep(s, nil, CalibrationData{"adopted", was, next}, fx), nil
}

// revert carries out Revert.
func (c *Core) revert(s *State, fx []Effect) ([]Effect, error) {
	k := &s.calibrating
	if k.inUse == nil && len(k.earlier) == 0 {
		return fx, fmt.Errorf("no calibration is in use, and none was before")
	}
	var next *calibration.Calibration
	if n := len(k.earlier); n > 0 {
		name := k.earlier[n-1]
		k.earlier = k.earlier[: n-1 : n-1]
		if next = k.find(name); next == nil && name != "" {
			s.Notice = fmt.Sprintf("calibration %q is no longer to be found: back to the bench file", name)
		}
	}
	was := nameOf(k.inUse)
	c.use(s, next)
	if s.Notice == "" {
		s.Notice = "in use: " + nameOf(next)
		if next == nil {
			s.Notice = "in use: the bench file, without a calibration"
		}
	}
	return c.keep(s, nil, CalibrationData{"reverted", was, next}, fx), nil
}

// keep records what became of a calibration and has it kept.
func (c *Core) keep(s *State, fresh *calibration.Calibration, d CalibrationData, fx []Effect) []Effect {
	k := &s.calibrating
	return append(fx,
		Record{At: s.Now, Kind: KindCalibration, Data: d, Sync: true},
		Keep{New: fresh, InUse: nameOf(k.inUse), Earlier: k.earlier})
}

// calibrate carries out Calibrate.
func (c *Core) calibrate(s *State, fx []Effect) ([]Effect, error) {
	if s.calibrating.fitting {
		return fx, fmt.Errorf("a calibration is being fitted already")
	}
	s.calibrating.fitting, s.Notice = true, "fitting the last scan"
	return append(fx, Fit{}), nil
}

// fitted takes the answer to Fit.
func (c *Core) fitted(s *State, e Fitted, fx []Effect) []Effect {
	k := &s.calibrating
	k.fitting = false
	if e.Calibration == nil {
		s.Notice = "no calibration: " + e.Err
		return append(fx, Record{At: s.Now, Kind: KindNote, Data: NoteData{Text: "no calibration could be fitted: " + e.Err}})
	}
	k.known = append(slices.Clone(k.known), e.Calibration)
	s.Notice = "fitted: " + e.Calibration.Name + "; i lists calibrations, u uses one"
	return c.keep(s, e.Calibration, CalibrationData{"fitted", nameOf(k.inUse), e.Calibration}, fx)
}

// found takes over what an earlier run has kept.
func (c *Core) found(s *State, e CalibrationsFound, fx []Effect) []Effect {
	k := &s.calibrating
	k.known, k.earlier = e.Known, e.Earlier
	note := e.Note
	use := k.find(e.InUse)
	if e.InUse != "" && use == nil {
		note = fmt.Sprintf("calibration %q was in use and is no longer to be found", e.InUse)
	}
	if note != "" {
		fx = append(fx, Record{At: s.Now, Kind: KindNote, Data: NoteData{Text: note}})
		s.Notice = note
	}
	if use == nil {
		return fx
	}
	c.use(s, use)
	return append(fx, Record{At: s.Now, Kind: KindCalibration, Data: CalibrationData{"in use", "", use}})
}

// Calibrations is what a screen shows of calibrations. All of it is read only.
type Calibrations struct {
	Known   []*calibration.Calibration // oldest first
	InUse   *calibration.Calibration   // nil: the bench file
	Why     string                     // why InUse does not correct predictions yet
	Earlier []string                   // in use before, newest last; empty names are the bench file
	Fitting bool
}

// Calibrations returns what is known of calibrations.
func (s *State) Calibrations() Calibrations {
	k := &s.calibrating
	return Calibrations{Known: k.known, InUse: k.inUse, Why: k.why, Earlier: k.earlier, Fitting: k.fitting}
}
