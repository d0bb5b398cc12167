package tui

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"time"
	"unicode/utf8"

	_ "barline/tui/background" // before bubbletea, see there

	tea "github.com/charmbracelet/bubbletea"

	"barline/model/bench"
	"barline/model/live"
	"barline/model/plan"
	"barline/tui/frame"
)

// Source is where snapshots come from and intents go to.
type Source interface {
	// Snapshot returns the newest snapshot; it never blocks.
	Snapshot() *live.Snapshot
	// Changed says that Snapshot would return a newer one. It is coalesced:
	// a channel of capacity one.
	Changed() <-chan struct{}
	// Do hands over an intent. It never blocks.
	Do(live.Intent)
}

// Options are how the dashboard meets its terminal.
type Options struct {
	Style Style
	In    io.Reader // nil is the standard input
	Out   io.Writer // nil is the standard output
	Plain bool      // begin without charts, for slow lines
	Greet bool      // begin by telling how to begin
	// Plan returns the plan's map of the bench, which forms show beside what is
	// typed; nil while there is none. It must not block. The function may be nil.
	Plan func() *plan.Map
}

const (
	// redrawEvery is the shortest time between two frames.
	redrawEvery = 33 * time.Millisecond
	// flushesPerSecond is how often bubbletea looks for a new frame to send: a
	// frame must not wait for it as long as it waited to be drawn.
	flushesPerSecond = 60
	// plainEvery is that without charts, which is for slow lines.
	plainEvery = 3 * time.Second
	// lateAfter is how long the bench may say nothing before the screen says
	// that it is old.
	lateAfter = 3 * time.Second
)

// Run shows the dashboard until the person leaves or ctx ends, both of which
// return nil. Leaving asks for HOLD first. Whatever goes wrong in drawing,
// the terminal is given back and HOLD is asked for. Signals are the caller's.
func Run(ctx context.Context, src Source, o Options) error {
	if o.Out == nil {
		o.Out = os.Stdout
	}
	inner, end := context.WithCancel(ctx)
	defer end()
	m := &model{ctx: inner, src: src, style: o.Style, s: src.Snapshot(), moved: time.Now(), plan: o.Plan}
	m.v.plain = o.Plain
	switch {
	case o.Greet:
		m.v = m.v.open(greetOverlay)
	case m.s != nil && m.s.Simulated && !m.s.ReadOnly:
		m.v.message = "new here? h shows how to begin"
	}
	options := []tea.ProgramOption{
		tea.WithContext(inner), tea.WithAltScreen(), tea.WithoutSignalHandler(), tea.WithFPS(flushesPerSecond), tea.WithOutput(o.Out),
	}
	if o.In != nil {
		options = append(options, tea.WithInput(o.In))
	}
	_, err := tea.NewProgram(m, options...).Run()
	if err == nil || ctx.Err() != nil && !errors.Is(err, tea.ErrProgramPanic) {
		return nil
	}
	src.Do(live.Hold{})
	return fmt.Errorf("screen: %w", err)
}

// StyleFor returns what the terminal can show, from the [screen] section of
// the bench file and the environment: NO_COLOR (any value but empty), TERM,
// COLORTERM and the locale. An unknown time zone is an error.
func StyleFor(screen bench.Screen, getenv func(string) string) (Style, error) {
	st := Style{Light: screen.Background == "light", ASCII: screen.ASCII, Zone: time.Local}
	if screen.TimeZone != "" && screen.TimeZone != "local" {
		zone, err := time.LoadLocation(screen.TimeZone)
		if err != nil {
			return st, fmt.Errorf("time zone %q: expected \"local\" or a name such as \"Europe/Lisbon\": %w", screen.TimeZone, err)
		}
		st.Zone = zone
	}
	locale := ""
	for _, name := range []string{"LC_ALL", "LC_CTYPE", "LANG"} { // POSIX.1-2017, section 8.2: the first that is set
		if locale = getenv(name); locale != "" {
			break
		}
	}
	if upper := strings.ToUpper(locale); locale != "" && !strings.Contains(upper, "UTF-8") && !strings.Contains(upper, "UTF8") {
		st.ASCII = true
	}
	term := getenv("TERM")
	switch {
	case getenv("NO_COLOR") != "" || term == "dumb":
		st.Colours = frame.NoColours
	case strings.Contains(term, "256color") || getenv("COLORTERM") != "":
		st.Colours = frame.Palette
	default:
		st.Colours = frame.Sixteen
	}
	return st, nil
}

// model is the dashboard as bubbletea runs it. Frames are drawn when something
// changed; View only hands out the last.
type model struct {
	ctx   context.Context
	src   Source
	style Style
	w, h  int
	v     view
	plan  func() *plan.Map
	s     *live.Snapshot
	frame *frame.Frame // as text, what the terminal shows
	text  string

	moved time.Time // wall time at which bench time was last seen to move
	drawn time.Time
}

// newer says that the bench has changed, pulse that a second has passed.
type (
	newer struct{}
	pulse struct{}
)

func (m *model) Init() tea.Cmd { return tea.Batch(m.wait(), m.second()) }

// wait returns the command that sleeps until the bench changes, at least
// redrawEvery after the last frame.
func (m *model) wait() tea.Cmd {
	every := redrawEvery
	if m.v.plain {
		every = plainEvery
	}
	after := every - time.Since(m.drawn)
	return func() tea.Msg {
		if after > 0 {
			t := time.NewTimer(after)
			defer t.Stop()
			select {
			case <-m.ctx.Done():
				return nil
			case <-t.C:
			}
		}
		select {
		case <-m.ctx.Done():
			return nil
		case <-m.src.Changed():
			return newer{}
		}
	}
}

func (m *model) second() tea.Cmd {
	return func() tea.Msg {
		t := time.NewTimer(time.Second)
		defer t.Stop()
		select {
		case <-m.ctx.Done():
			return nil
		case <-t.C:
			return pulse{}
		}
	}
}

func (m *model) Update(msg tea.Msg) (tea.Model, tea.Cmd) {
	var cmd tea.Cmd
	switch msg := msg.(type) {
	case tea.WindowSizeMsg:
		m.w, m.h = msg.Width, msg.Height
	case newer:
		m.take()
		m.draw()
		return m, m.wait()
	case pulse:
		m.take()
		was := m.v.late
		m.v.late = 0
		if late := time.Since(m.moved); late > lateAfter {
			m.v.late = late
		}
		cmd = m.second()
		if m.v.plain && m.v.late == was && time.Since(m.drawn) < plainEvery {
			return m, cmd
		}
	case tea.KeyMsg:
		cmd = m.key(msg)
	case tea.MouseMsg:
		m.take()
		if m.s != nil && m.frame != nil {
			m.v = m.v.mouse(msg, m.frame, m.s)
		}
	default:
		return m, nil
	}
	m.draw()
	return m, cmd
}

// take fetches the newest snapshot and notes whether bench time moves.
func (m *model) take() {
	s := m.src.Snapshot()
	if s != nil && (m.s == nil || s.Now.Mono != m.s.Now.Mono) {
		m.moved, m.v.late = time.Now(), 0
	}
	m.s = s
}

func (m *model) draw() {
	m.drawn = time.Now()
	m.frame = draw(m.s, m.v, m.w, m.h, m.style)
	m.text = m.frame.String()
}

func (m *model) View() string { return m.text }

// key answers a key message, which may carry many characters. Pasted text is
// text for a form that is open and nothing otherwise: it presses no keys.
func (m *model) key(msg tea.KeyMsg) tea.Cmd {
	m.take()
	s := m.s
	if s == nil {
		s = &live.Snapshot{}
	}
	if msg.Paste && !m.v.typing() {
		return nil
	}
	mousing := m.v.mousing
	for _, name := range names(msg) {
		var intents []live.Intent
		m.v, intents = m.v.press(name, s)
		if m.plan != nil {
			m.v.planned = m.plan()
		}
		for _, in := range intents {
			if _, leave := in.(quit); leave {
				return tea.Quit
			}
			m.src.Do(in)
		}
	}
	switch {
	case m.v.mousing && !mousing:
		return tea.EnableMouseCellMotion
	case mousing && !m.v.mousing:
		return tea.DisableMouse
	}
	return nil
}

// names are the keys in a message: one a character, or the one with a name.
func names(msg tea.KeyMsg) []string {
	if msg.Alt || msg.Type != tea.KeyRunes && msg.Type != tea.KeySpace {
		return []string{tea.Key{Type: msg.Type, Alt: msg.Alt, Runes: msg.Runes}.String()}
	}
	out := make([]string, 0, len(msg.Runes))
	for _, r := range msg.Runes {
		if r != utf8.RuneError {
			out = append(out, string(r))
		}
	}
	return out
}
