package tui

import (
	"fmt"
	"strings"

	"barline/model/emission"
	"barline/model/live"
	"barline/model/unit"
	"barline/tui/frame"
)

func pressTune(v view, s *live.Snapshot, _ string) (view, []live.Intent) {
	if !armed(s) {
		v.message = "not armed: press a first"
		return v, nil
	}
	return v.open(tuneOverlay), nil
}

// parseTune reads a wavelength as a person types it, with "hold" behind it
// where it is to be kept, and finds it on the predicted curve.
func parseTune(s *live.Snapshot, text string) (in live.Tune, at unit.Pascal, err error) {
	text, in.Hold = strings.CutSuffix(strings.TrimSpace(text), "hold")
	if in.Emission, err = unit.ParseLength(text); err != nil {
		return in, 0, err
	}
	low, high := spectrometerRange(s)
	if nm := in.Emission.Nanometres(); !(nm >= low && nm <= high) {
		return in, 0, fmt.Errorf("%s nm: the spectrometer sees %s to %s nm", fixed(nm, 1), fixed(low, 0), fixed(high, 0))
	}
	at, ok := pressureOf(s.Curve, in.Emission)
	if !ok {
		return in, 0, fmt.Errorf("%s nm is not on the predicted curve", fixed(in.Emission.Nanometres(), 1))
	}
	if s.Bench == nil {
		return in, 0, fmt.Errorf("no bench file: its limits are not known")
	}
	return in, at, s.Bench.Limits.Enforced().Admissible(at)
}

// pressureOf returns the lowest pressure at which the curve emits at the
// wavelength; ok is false where it does nowhere.
func pressureOf(curve []emission.CurvePoint, wanted unit.Metre) (at unit.Pascal, ok bool) {
	for i := 1; i < len(curve); i++ {
		a, b := curve[i-1], curve[i]
		if !(a.Emission > 0) || !(b.Emission > 0) || a.Emission == b.Emission || (wanted-a.Emission)*(wanted-b.Emission) > 0 {
			continue
		}
		f := unit.Pascal((wanted - a.Emission) / (b.Emission - a.Emission))
		return a.Pressure + f*(b.Pressure-a.Pressure), true
	}
	return 0, false
}

func drawTune(a frame.Area, s *live.Snapshot, v view) {
	b, below, planned := formBox(a, "tune to a wavelength", v)
	if planned {
		in, at, err := parseTune(s, v.text)
		if err != nil {
			at = s.Setpoint
		}
		drawPlan(below, v.planned, s, in.Emission, at)
	}
	b.Text(0, 0, "such as 265 nm, or 265 nm hold to keep it there", frame.Faint)
	input(b.Sub(0, 2, b.W, 1), v.text)
	if v.text == "" {
		return
	}
	in, at, err := parseTune(s, v.text)
	if err != nil {
		wrap(b.Sub(0, 4, b.W, 3), err.Error(), frame.Caution)
		return
	}
	answer := ""
	if s.Prediction.Valid {
		answer = " by " + s.Prediction.Answer.String()
	}
	b.Text(0, 4, "◇ predicted at "+pressureText(at)+answer, frame.Predicted)
	b.Text(0, 5, outlook(s, s.Setpoint, at)+" of ramp", frame.Plain)
	what := "then corrected on what is measured, a step at a time"
	if in.Hold {
		what += ", and held"
	}
	b.Text(0, 6, what, frame.Faint)
}
