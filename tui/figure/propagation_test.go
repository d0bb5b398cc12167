package figure

import (
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"image/png"
	"io"
	"strings"
	"testing"

	"barline/model/fibre"
	"barline/model/gas"
	"barline/model/pulse"
	"barline/model/unit"
)

func light(t *testing.T, samples int) *pulse.Result {
	t.Helper()
	medium, err := gas.New(gas.Spec{Composition: "argon"})
	if err != nil {
		t.Fatal(err)
	}
	state, err := medium.At(9*unit.Bar, 295, 0)
	if err != nil {
		t.Fatal(err)
	}
	f, err := fibre.New(fibre.Spec{Kind: fibre.Capillary, CoreDiameter: 34 * unit.Micrometre, Length: 0.02})
	if err != nil {
		t.Fatal(err)
	}
	s := pulse.Setup{Fibre: f, Gas: state, Pulse: pulse.Pulse{Wavelength: 1030 * unit.Nanometre, Duration: 35 * unit.Femtosecond, Energy: 1.5 * unit.Microjoule}}
	r, err := s.Run(context.Background(), pulse.Options{Tolerance: 1e-3, Samples: samples})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func TestPictureOfLight(t *testing.T) {
	r := light(t, 12)
	var svg bytes.Buffer
	if err := Propagation(&svg, "svg", r); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"wavelength (nm)", "along the fibre (cm)", "argon 9 bar, 1.5 uJ, 35 fs", ">1000<"} {
		if !strings.Contains(svg.String(), want) {
			t.Errorf("the picture does not say %q", want)
		}
	}
	for d := xml.NewDecoder(&svg); ; {
		if _, err := d.Token(); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatalf("no well-formed XML: %v", err)
		}
	}
	var raster bytes.Buffer
	if err := Propagation(&raster, "png", r); err != nil {
		t.Fatal(err)
	}
	img, err := png.Decode(&raster)
	if err != nil || img.Bounds().Dx() < 400 || img.Bounds().Dy() < 400 {
		t.Errorf("picture %v, %v", img, err)
	}
}

func TestPictureWithoutEvolution(t *testing.T) {
	var svg bytes.Buffer
	if err := Propagation(&svg, "svg", light(t, 0)); err != nil || strings.Contains(svg.String(), "along the fibre") {
		t.Errorf("%v; want the spectrum alone", err)
	}
	if err := Propagation(io.Discard, "gif", light(t, 0)); err == nil {
		t.Error("an unknown format was accepted")
	}
}
