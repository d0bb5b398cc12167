package main

import (
	"os"

	"github.com/spf13/cobra"

	"barline/model/calibration"
	"barline/model/emission"
)

// useCalibration is the calibration that predict lays over its answers.
type useCalibration struct {
	name, logbook string
	corrector     *calibration.Corrector
}

func (u *useCalibration) bind(cmd *cobra.Command) {
	cmd.Flags().StringVar(&u.name, "calibration", "", "lay this calibration over the anchored answer: the name of one in the logbook, or its file")
	cmd.Flags().StringVar(&u.logbook, "logbook", "", "with --calibration: folder of the logbook that has it; default: that of the bench file")
}

// check refuses what does not go with a calibration.
func (u *useCalibration) check(in *inputs) error {
	if in.given("emission") && in.emission != emission.Anchored.String() {
		return usage("--calibration corrects the anchored answer, not %q: leave --emission out", in.emission)
	}
	return nil
}

// over finds the calibration and makes it ready for the predictor.
func (u *useCalibration) over(p *emission.Predictor, in *inputs) error {
	if u.name == "" {
		return nil
	}
	c, err := u.find(in)
	if err != nil {
		return err
	}
	u.corrector, err = calibration.NewCorrector(c, p.Nodes())
	return err
}

func (u *useCalibration) find(in *inputs) (*calibration.Calibration, error) {
	if info, err := os.Stat(u.name); err == nil && info.Mode().IsRegular() {
		return readCalibration(u.name)
	}
	folder := u.logbook
	if folder == "" {
		if in.bench == "" {
			return nil, usage("--calibration %q is no file, and without a bench file or --logbook there is no logbook to look in", u.name)
		}
		_, b, err := readBench(in.bench)
		if err != nil {
			return nil, err
		}
		if folder, err = logbookFolder("", b.Logbook.Folder, b.Bench.Name, false); err != nil {
			return nil, err
		}
	}
	_, c, _, err := oneCalibration(folder, u.name)
	return c, err
}

// predict answers as p does, with the calibration laid over where there is one.
func (u *useCalibration) predict(p *emission.Predictor, in emission.Input, before *emission.Prediction) emission.Prediction {
	pr := p.Predict(in, before)
	if u.corrector != nil {
		u.corrector.Correct(&pr)
	}
	return pr
}

// beyondText marks a prediction outside the data of its calibration.
func beyondText(pr emission.Prediction) string {
	if pr.Beyond {
		return "beyond the data of the calibration"
	}
	return ""
}

// calibrationText says which calibration a prediction stands on; "" without one.
func calibrationText(pr emission.Prediction) string {
	switch {
	case pr.Calibration == "":
		return ""
	case pr.Beyond:
		return pr.Calibration + ", beyond its data"
	}
	return pr.Calibration
}
