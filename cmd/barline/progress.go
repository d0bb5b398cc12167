package main

import (
	"fmt"
	"io"
	"os"
	"strings"
	"sync"
	"time"

	"github.com/mattn/go-isatty"
)

// bar is a progress bar on a terminal; elsewhere it says nothing. It may be
// used from several goroutines.
type bar struct {
	w  io.Writer // nil where nothing is shown
	mu sync.Mutex

	started, drawn time.Time
	shown          bool
}

const (
	barWidth = 30
	barEvery = 100 * time.Millisecond
	barAfter = 300 * time.Millisecond // what is done sooner needs no bar
)

func newBar(w io.Writer) *bar {
	b := &bar{started: time.Now()}
	if f, ok := w.(*os.File); ok && isatty.IsTerminal(f.Fd()) {
		b.w = w
	}
	return b
}

// share draws that a share of one task is done.
func (b *bar) share(share float64) { b.draw(share, "") }

// draw draws a share with a text behind it, and the time left as it looks.
func (b *bar) draw(share float64, text string) {
	if b.w == nil {
		return
	}
	b.mu.Lock()
	defer b.mu.Unlock()
	now := time.Now()
	if now.Sub(b.started) < barAfter || now.Sub(b.drawn) < barEvery {
		return
	}
	b.drawn, b.shown = now, true
	full := int(barWidth * min(max(share, 0), 1))
	left := ""
	if share > 0.02 {
		left = ", " + timeLeft(now.Sub(b.started), share)
	}
	fmt.Fprintf(b.w, "\r\x1b[K[%s%s] %3.0f %%%s%s", strings.Repeat("#", full), strings.Repeat(".", barWidth-full), 100*share, text, left)
}

// timeLeft says how long the rest takes if it goes on as so far.
func timeLeft(spent time.Duration, share float64) string {
	rest := time.Duration(float64(spent) * (1 - share) / share)
	if rest < time.Minute {
		return fmt.Sprintf("%.0f s left", rest.Seconds())
	}
	return rest.Round(time.Second).String() + " left"
}

// clear removes the bar.
func (b *bar) clear() {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.shown {
		fmt.Fprint(b.w, "\r\x1b[K")
		b.shown = false
	}
}
