package tui

import (
	"fmt"
	"math"
	"strings"
	"time"

	"barline/model/live"
	"barline/model/reading"
	"barline/model/unit"
	"barline/tui/frame"
)

// drawSpectrum shows the measured spectrum over the one that a full-field run
// predicts, what both say of the emission, and the light along the fibre.
func drawSpectrum(a frame.Area, s *live.Snapshot, v view) {
	words := spectrumWords(s)
	if v.plain {
		heading(a, "spectrum", "")
		drawWords(a.Sub(0, 2, a.W, a.H-2), words)
		return
	}
	below := max(7, (a.H-len(words)-1)*2/5)
	top := a.H - len(words) - 1 - below
	drawSpectra(a.Sub(0, 0, a.W, top), s, v)
	drawWords(a.Sub(0, top, a.W, len(words)), words)
	drawFibre(a.Sub(0, a.H-below, a.W, below), s)
}

// said is one line of the words beside the spectra.
type said struct {
	mark, name, text string
	ink              frame.Ink
}

func drawWords(a frame.Area, words []said) {
	for y, w := range words {
		x := a.Text(1, y, w.mark, w.ink) + 1
		x = max(a.Text(x, y, w.name, w.ink)+1, 14)
		a.Sub(0, y, a.W-1, 1).Text(x, 0, w.text, frame.Plain)
	}
}

// spectrumWords says what both spectra say, for which inputs and how old.
func spectrumWords(s *live.Snapshot) []said {
	words := []said{measuredWords(s), predictedWords(s)}
	if text := inputWords(s); text != "" {
		words = append(words, said{text: text})
	}
	if p := s.Propagated; p != nil && p.Err == "" && !p.Reliable {
		words = append(words, said{"△", "not sure", strings.Join(p.Reasons, "; "), frame.Caution})
	}
	return words
}

func measuredWords(s *live.Snapshot) said {
	w := said{mark: "●", name: "measured", ink: frame.Measured}
	e := show(s, reading.Emission)
	switch {
	case !fitted(s, reading.Emission) && s.Spectrum == nil:
		w.mark, w.ink, w.text = "○", frame.Faint, "this bench has no spectrometer"
		return w
	case !e.known:
		w.mark, w.ink, w.text = "○", e.ink, strings.TrimLeft(e.mark, "●○✕△◆ ")
		if r := s.Latest[reading.Emission].Reason; r != "" && r != w.text {
			w.text += ": " + r
		}
	default:
		w.text = emissionText(unit.Metre(s.Latest[reading.Emission].Value), scatter(s))
	}
	if r := show(s, reading.EmissionWidth); r.known && e.known {
		w.text += " · " + r.value + " wide"
	}
	if r := show(s, reading.EmissionStrength); r.known && e.known {
		w.text += " · " + r.value
	}
	switch sp := s.Spectrum; {
	case sp == nil && s.ReadOnly:
		w.text += " · the record holds spectra of scan steps only"
	case sp == nil:
		w.text += " · no whole spectrum is sent"
	case s.ReadOnly:
		w.text += " · spectrum of a scan step, " + ageText(s.Now.Mono-sp.Taken.Mono) + " old"
	case sp.Status != reading.Good:
		w.text += " · " + sp.Reason
	}
	return w
}

// scatterOver is the stretch over which the scatter of the measured emission is
// taken.
const scatterOver = 5 * time.Second

// scatter returns the standard deviation of the emission over the last seconds;
// 0 where there is too little.
func scatter(s *live.Snapshot) unit.Metre {
	view := s.Trends[reading.Emission]
	if view == nil {
		return 0
	}
	level := view.Since(s.Now.Mono - scatterOver)
	n, mean, sum := 0.0, 0.0, 0.0
	for _, b := range level.Buckets {
		if b.Count == 0 || b.Start < s.Now.Mono-scatterOver {
			continue
		}
		n++
		d := b.Mean - mean
		mean += d / n
		sum += d * (b.Mean - mean)
	}
	if n < 5 {
		return 0
	}
	return unit.Metre(math.Sqrt(sum / (n - 1)))
}

func predictedWords(s *live.Snapshot) said {
	w := said{mark: "◇", name: "full field", ink: frame.Predicted}
	p, next := s.Propagated, s.Propagation
	switch {
	case p == nil && next.Busy:
		w.text = fmt.Sprintf("no spectrum yet: the first run is %.0f %% done", 100*next.Share)
	case p == nil && next.On && !s.CoreKnown:
		w.text = "no spectrum yet: it is not known what gas is in the core"
	case p == nil && next.On:
		w.text = "no spectrum yet: a run is about to begin"
	case p == nil && next.Why != "":
		w.text = "no spectrum: " + next.Why
	case p == nil:
		w.text = "no spectrum yet"
	case p.Err != "":
		w.text = "no spectrum: " + p.Err
	case p.Emission == 0:
		w.text = "no emission · " + energyWords(p)
	default:
		w.text = emissionText(p.Emission, p.Sigma) + " · " + fixed(p.Width.Nanometres(), 1) + " nm wide · " +
			fixed(100*float64(p.Conversion), 1) + " % · " + energyWords(p)
	}
	if p != nil && p.Err == "" {
		for _, o := range p.Others {
			w.text += fmt.Sprintf(" · also %.0f nm, %.1f %%", o.Emission.Nanometres(), 100*float64(o.Conversion))
		}
	}
	return w
}

func energyWords(p *live.Propagated) string {
	return fixed(1e3*p.Ultraviolet.Microjoules(), 1) + " nJ below 400 nm"
}

// inputWords says for which inputs the run was made, how old they are, and
// whether another is under way.
func inputWords(s *live.Snapshot) string {
	p := s.Propagated
	if p == nil {
		return ""
	}
	text := "for " + pressureText(p.Input.Pressure) + ", " + fixed(p.Input.Temperature.Celsius(), 1) + " °C, " + fixed(p.Input.Energy.Microjoules(), 2) + " µJ"
	if !fitted(s, reading.PulseEnergy) {
		text += " stated"
	}
	text += " · " + ageText(s.Now.Mono-p.Asked.Mono) + " old"
	switch {
	case !s.CoreKnown:
	case holds(s, p):
		text += ", holds still"
	default:
		text += ", now " + pressureText(s.Core)
	}
	if n := s.Propagation; n.Busy {
		text += fmt.Sprintf(" · next: %s, %.0f %%", pressureText(n.For.Pressure), 100*n.Share)
	}
	return text
}

// holds reports whether the bench is where the run was made for: the emission
// has moved by less than some 0.2 nm.
func holds(s *live.Snapshot, p *live.Propagated) bool {
	now := s.Prediction.Input
	return math.Abs(float64(s.Core-p.Input.Pressure)) <= 2e-3*float64(p.Input.Pressure) &&
		math.Abs(float64(now.Energy-p.Input.Energy)) <= 1e-2*float64(p.Input.Energy) &&
		math.Abs(float64(now.Temperature-p.Input.Temperature)) <= 0.5
}

// ageText is spanText for what may be younger than a second.
func ageText(d time.Duration) string {
	if d < 10*time.Second {
		return fixed(max(d, 0).Seconds(), 1) + " s"
	}
	return spanText(d)
}
