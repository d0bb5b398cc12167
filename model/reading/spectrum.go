package reading

import "barline/model/unit"

// Spectrum is a whole spectrum as a spectrometer sent it. It is never changed
// once it was handed on; spectra of one instrument may share Wavelength.
type Spectrum struct {
	Instrument string
	Taken      Stamp
	Wavelength []unit.Metre // of the pixels, vacuum, ascending
	Counts     []float64    // of the pixels, as sent, in the order of Wavelength
	Dark       float64      // counts of a pixel without light
	Saturation float64      // counts at which a pixel is full; 0 where not known
	Status     Status
	Reason     string // why the status is not good
}
