package simulate

import (
	"math"
	"strconv"

	"barline/simulate/panel"
)

// spectrometer sums light over its integration time and then says one line:
//
//	EM 268.14 nm W 18.32 nm S 7.41 % P 103,98,101,…
//
// wavelength and width of the emission, its share of the light, and the counts
// of every pixel. Where it finds no emission it has dashes for wavelength and
// width, where there is no light at all also for the share.
type spectrometer struct {
	frames int
	lit    int
	gas    panel.State // sums
	energy float64     // sum, J
	lines  int64

	compression float64 // where along the core the light is made, as last known
}

const (
	integration = 10 // frames: 200 ms
	threshold   = 0.0015
	fullScale   = 0.12 // share at which the detector saturates
)

// expose adds the frame that has just ended.
func (s *spectrometer) expose(b *Bench) {
	if !b.faults.shutter {
		c := b.core()
		s.gas.P += c.P
		s.gas.T += c.T
		s.gas.Air += c.Air
		s.energy += b.energy
		s.lit++
	}
	if s.frames++; s.frames < integration {
		return
	}
	s.lines++
	if b.faults.dead["spectrometer"] || b.faults.unplugged[spectrometerLine] {
		s.begin()
		return
	}
	var e Emission
	line := []byte("EM --- nm W --- nm S --- %")
	if s.lit > 0 {
		n := float64(s.lit)
		e = b.light.Emit(Conditions{Gas: panel.State{P: s.gas.P / n, T: s.gas.T / n, Air: s.gas.Air / n}, Energy: s.energy / n})
		e.Strength *= n / integration
		s.compression = e.Compression
		line = s.line(b, e)
	}
	b.ports[spectrometerLine].say(b, s.pixels(b, e, line))
	s.begin()
}

// begin begins the next integration.
func (s *spectrometer) begin() {
	*s = spectrometer{lines: s.lines, compression: s.compression}
}

// line writes what the detector makes of an emission.
func (s *spectrometer) line(b *Bench, e Emission) []byte {
	strength := max(0, e.Strength*(1+0.01*b.noise.normal(ofStrength, s.lines))+2e-4*b.noise.normal(ofStrength, -1-s.lines))
	if !(strength > threshold) || e.Wavelength == 0 {
		return share(append([]byte(nil), "EM --- nm W --- nm S "...), strength)
	}
	width := e.Width
	if strength > fullScale { // the top is cut off, which widens what is left
		width *= strength / fullScale
		strength = fullScale
	}
	// The centroid is the surer the more light there is.
	rms := 0.03e-9 * math.Sqrt(0.05/strength)
	wavelength := e.Wavelength + float64(b.truth.Wavelength) + rms*b.noise.normal(ofWavelength, s.lines)
	width *= 1 + 0.01*b.noise.normal(ofWidth, s.lines)
	line := append([]byte(nil), "EM "...)
	line = strconv.AppendFloat(line, wavelength*1e9, 'f', 2, 64)
	line = append(line, " nm W "...)
	line = strconv.AppendFloat(line, width*1e9, 'f', 2, 64)
	return share(append(line, " nm S "...), strength)
}

// The detector, as its bench file has it: pixel 0 and the step to the next,
// counts without light and counts at which a pixel is full.
const (
	pixelCount = 256
	pixelFirst = 190e-9  // m
	pixelStep  = 0.82e-9 // m
	darkCounts = 100
	fullCounts = 4095
	// brightest is the counts in the highest pixel for an emission of fullScale
	// and usualWidth.
	brightest  = 3600
	usualWidth = 15e-9 // m
	readNoise  = 3     // counts, rms
	perCount   = 40    // electrons, for the shot noise
)

// pixels appends what every pixel counted of the emission, and the end of the
// line.
func (s *spectrometer) pixels(b *Bench, e Emission, line []byte) []byte {
	line = append(line, " P "...)
	height, rms := 0.0, usualWidth/2.3548
	if e.Wavelength > 0 && e.Strength > 0 && e.Width > 0 {
		height, rms = brightest*e.Strength/fullScale*usualWidth/e.Width, e.Width/2.3548
	}
	middle := e.Wavelength + float64(b.truth.Wavelength)
	for i := range int64(pixelCount) {
		if i > 0 {
			line = append(line, ',')
		}
		x := (pixelFirst + pixelStep*float64(i) - middle) / rms
		lit := height * math.Exp(-x*x/2)
		counts := darkCounts + lit + math.Sqrt(readNoise*readNoise+lit/perCount)*b.noise.normal(ofPixels, s.lines*pixelCount+i)
		line = strconv.AppendInt(line, int64(math.Round(min(max(counts, 0), fullCounts))), 10)
	}
	return append(line, "\r\n"...)
}

func share(line []byte, strength float64) []byte {
	return append(strconv.AppendFloat(line, strength*100, 'f', 2, 64), " %"...)
}
