package tui

import (
	"barline/model/live"
	"barline/tui/frame"
)

// Page is one of the pages of the dashboard.
type Page uint8

const (
	// Bench shows the gas path, the pressure, the emission and how far it is
	// from where it should be.
	Bench Page = iota
	// Spectrum shows the measured spectrum over the predicted one, and the
	// light along the fibre.
	Spectrum
	// Scan shows a run of pressure steps: progress, rows, and how far each
	// point is from the prediction, rising and falling apart.
	Scan
	// Drift lays what is measured beside the residual, on one time axis.
	Drift
	// Log shows the record as it grows.
	Log
	pageCount
)

var pageText = [pageCount]string{"bench", "spectrum", "scan", "drift", "log"}

// String returns the page's name as the screen writes it.
func (p Page) String() string {
	if p < pageCount {
		return pageText[p]
	}
	return "no such page"
}

// Pages returns every page in the order of its keys.
func Pages() []Page {
	all := make([]Page, pageCount)
	for i := range all {
		all[i] = Page(i)
	}
	return all
}

// Style says what the terminal can show, see package frame.
type Style = frame.Style

// The smallest terminal that a whole page fits.
const (
	minWidth  = 80
	minHeight = 24
)

// Render draws page of s as h lines of at most w columns, parted by "\n". It
// is pure. A nil snapshot is drawn as a bench of which nothing is known.
func Render(s *live.Snapshot, page Page, w, h int, style Style) string {
	return Draw(s, page, w, h, style).String()
}

// Draw is Render as cells, for pictures of a screen.
func Draw(s *live.Snapshot, page Page, w, h int, style Style) *frame.Frame {
	return draw(s, view{page: page}, w, h, style)
}

// draw draws what v shows of s.
func draw(s *live.Snapshot, v view, w, h int, style Style) *frame.Frame {
	if s == nil {
		s = &live.Snapshot{}
	}
	if v.frozen != nil {
		s = v.frozen.over(s)
	}
	f := frame.New(w, h, style)
	a := f.Area()
	if w < minWidth || h < minHeight {
		drawSmall(a, s, v)
		return f
	}
	drawHead(a.Sub(0, 0, w, headHeight), s, v)
	body := a.Sub(0, headHeight, w, h-headHeight-1)
	switch {
	case v.page == Log:
		drawLog(body, s, v)
	case v.page == Spectrum:
		drawSpectrum(body, s, v)
	case v.page == Scan:
		drawScan(body, s, v)
	case v.plain:
		drawPlain(body, s)
	case v.page == Drift:
		drawDrift(body, s, v)
	default:
		drawBench(body, s, v)
	}
	drawFoot(a.Sub(0, h-1, w, 1), s, v)
	drawOverlay(body, s, v)
	return f
}
