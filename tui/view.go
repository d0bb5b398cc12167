package tui

import (
	"time"

	"barline/model/live"
	"barline/model/plan"
)

// view is what a person has done to the screen: which page, how far back,
// which form is open. It holds nothing about the gas.
type view struct {
	page    Page
	zoom    int           // steps from the usual span, negative is closer
	back    time.Duration // from the present to the right end of the time axes
	frozen  *frozen
	cursor  time.Duration // bench Mono that is read out; 0: none
	plain   bool          // no charts, for slow lines
	mousing bool          // the mouse is ours and not the terminal's
	near    bool          // the emission map shows what is near
	whole   bool          // the spectra are drawn over all wavelengths
	linear  bool          // and their intensity is not logarithmic
	scroll  int           // lines of the record back from the newest
	find    string        // only lines of the record with this
	pick    int           // alarm chosen in the list
	overlay overlay
	text    string // what has been typed into the form
	past    past   // what was typed into forms before
	recall  int    // how far back in past the form is; 0: what is typed
	message string // why the last key did nothing, or what it did
	late    time.Duration
	pending *pending // waits behind cautionOverlay
	planned *plan.Map
}

// overlay is what stands over the page.
type overlay uint8

const (
	noOverlay overlay = iota
	helpOverlay
	armOverlay      // the caution, before the bench is armed
	setpointOverlay // a pressure is being typed
	noteOverlay     // a remark is being typed
	alarmOverlay    // the list of alarms
	leaveOverlay    // leaving was asked for
	runOverlay      // a scan or a procedure is being typed
	findOverlay     // what to find in the record is being typed
	greetOverlay    // how to begin
	tuneOverlay     // a wavelength is being typed
	orderOverlay    // a valve, an energy or a zero is being typed
	cautionOverlay  // what is to be read before gas moves

	calibrationOverlay // the list of calibrations
	stepOverlay        // the drift in full, and the step that would tell
	overlayCount
)

// typing reports whether keys are text.
func (v view) typing() bool {
	switch v.overlay {
	case armOverlay, setpointOverlay, noteOverlay, runOverlay, findOverlay, tuneOverlay, orderOverlay:
		return true
	}
	return false
}

// spans are the stretches of time that the time axes can show, usualSpan the
// one that a view begins with.
var spans = [...]time.Duration{
	20 * time.Second, time.Minute, 2 * time.Minute, 5 * time.Minute, 10 * time.Minute, 30 * time.Minute,
	time.Hour, 3 * time.Hour, 6 * time.Hour, 12 * time.Hour, 24 * time.Hour,
	3 * 24 * time.Hour, 7 * 24 * time.Hour, 14 * 24 * time.Hour, 30 * 24 * time.Hour,
}

const usualSpan = 2

// span is the stretch that the time axes show.
func (v view) span() time.Duration {
	usual := usualSpan
	if v.page == Drift { // what drifts does so over half an hour, not two minutes
		usual += 3
	}
	return spans[min(max(usual+v.zoom, 0), len(spans)-1)]
}

// open shows an overlay, its form empty; noOverlay closes what is open.
func (v view) open(o overlay) view {
	v.overlay, v.text, v.recall = o, "", 0
	return v
}

// past are the newest entries of the forms that move gas, newest first.
type past [8]entry

type entry struct {
	form overlay
	text string
}

// with returns p with one more entry; the same one is not kept twice.
func (p past) with(e entry) past {
	kept := past{e}
	n := 1
	for _, old := range p {
		if old != e && old.text != "" && n < len(kept) {
			kept[n] = old
			n++
		}
	}
	return kept
}

// of returns the n-th newest entry of a form, counted from 1.
func (p past) of(form overlay, n int) (string, bool) {
	for _, e := range p {
		if e.form == form && e.text != "" {
			if n--; n == 0 {
				return e.text, true
			}
		}
	}
	return "", false
}

// freeze keeps the charts of s.
func freeze(s *live.Snapshot) *frozen { return &frozen{snapshot: s, at: s.Now.Mono} }
