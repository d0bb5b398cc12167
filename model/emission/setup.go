package emission

import (
	"fmt"
	"math"
	"strings"

	"barline/model/bench"
	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/reading"
	"barline/model/unit"
)

// ParseAnswer reads the name of an answer; empty means Estimate.
func ParseAnswer(text string) (Answer, error) {
	if text == "" {
		return Estimate, nil
	}
	for i, name := range answerText {
		if name == text {
			return Answer(i), nil
		}
	}
	return 0, fmt.Errorf("emission %q is not known: expected one of %s", text, strings.Join(answerText[:], ", "))
}

// Setup is one bench as predictions need it.
type Setup struct {
	Gas            gas.Spec
	Fibre          fibre.Spec
	Pulse          pulse.Pulse // its Energy stands in where an Input has none
	RepetitionRate unit.Hertz  // 0: heating is not judged
	Answer         Answer
	Plasma         pulse.Plasma // over what the rough ionised fraction is taken

	Uncertainty  Uncertainty
	Spectrometer gas.Span    // what it can see; zero: not judged
	Rating       unit.Pascal // lowest pressure rating; 0: not judged
}

// SetupFromBench makes the setup that a bench file describes. Where the file
// asks for the anchored answer the setup asks for the estimate, which serves
// until full-field nodes stand.
func SetupFromBench(b *bench.Bench) (Setup, error) {
	kind, err := fibre.ParseKind(b.Fibre.Kind)
	if err != nil {
		return Setup{}, fmt.Errorf("[fibre] kind: %w", err)
	}
	shape, err := ParseShape(b.Pulse.Shape)
	if err != nil {
		return Setup{}, fmt.Errorf("[pulse] shape: %w", err)
	}
	answer, err := ParseAnswer(b.Emission.Answer)
	if err != nil {
		return Setup{}, fmt.Errorf("[emission] answer: %w", err)
	}
	s := Setup{
		Gas: gas.Spec{Composition: b.Gas.Species, Density: b.Gas.Density, Index: b.Gas.Index, N2: b.Gas.N2},
		Fibre: fibre.Spec{
			Kind: kind, CoreDiameter: b.Fibre.CoreDiameter, Wall: b.Fibre.Wall, Length: b.Fibre.Length,
			Loss: fibre.Loss{Constant: b.Fibre.Loss},
		},
		Pulse: pulse.Pulse{
			Wavelength: b.Pulse.Wavelength, Duration: b.Pulse.Duration, Shape: shape,
			Energy: b.Pulse.Energy, GDD: b.Pulse.GDD,
		},
		RepetitionRate: b.Pulse.RepetitionRate,
		Answer:         min(answer, Estimate), // until full-field nodes stand
		Uncertainty:    DefaultUncertainty(),
		Rating:         b.Limits.Enforced().Lowest().Max,
		Spectrometer:   sees(b),
	}
	_, _, err = s.check()
	return s, err
}

// sees returns the range of the channel that reads the emission.
func sees(b *bench.Bench) gas.Span {
	for i := range b.Instrument {
		for j := range b.Instrument[i].Channel {
			if ch := &b.Instrument[i].Channel[j]; ch.Role == reading.Emission && ch.HasRange() {
				return gas.Span{From: unit.Metre(ch.Low), To: unit.Metre(ch.High)}
			}
		}
	}
	return gas.Span{}
}

// ParseShape reads "sech2" or "gauss"; empty means sech2.
func ParseShape(text string) (pulse.Shape, error) {
	switch text {
	case "", "sech2":
		return pulse.Sech2, nil
	case "gauss":
		return pulse.Gauss, nil
	}
	return 0, fmt.Errorf("pulse shape %q is not known: expected sech2 or gauss", text)
}

func checkPulse(p pulse.Pulse) error {
	switch {
	case !(p.Wavelength >= 200*unit.Nanometre && p.Wavelength <= 5*unit.Micrometre):
		return fmt.Errorf("pulse: wavelength is %v, expected 200 nm to 5 um", p.Wavelength)
	case !(p.Duration > 0 && p.Duration <= 1e-11):
		return fmt.Errorf("pulse: duration is %.4g fs, expected above 0 and up to 10000 fs", p.Duration.Femtoseconds())
	case !(p.Energy >= 0 && p.Energy <= 1):
		return fmt.Errorf("pulse: energy is %.4g uJ, expected zero or above and up to 1 J", p.Energy.Microjoules())
	case !(math.Abs(float64(p.GDD)) <= 1e-24):
		return fmt.Errorf("pulse: group-delay dispersion is %.4g fs2, expected between -1000000 and 1000000 fs2", float64(p.GDD)*1e30)
	case p.Shape > pulse.Gauss:
		return fmt.Errorf("pulse: shape %d is not known", p.Shape)
	}
	return nil
}
