package emission

import "barline/model/unit"

// Answer names which of the phase-matching answers a prediction gives.
type Answer uint8

const (
	// Linear phase matching leaves the nonlinear term out.
	Linear Answer = iota
	// Estimate adds a nonlinear term fitted to full-field runs.
	Estimate
	// Anchored takes the nonlinear term from full-field runs at nodes of
	// this bench.
	Anchored
)

var answerText = [...]string{"linear", "estimate", "anchored"}

// String returns the answer's name as commands and bench files spell it.
func (a Answer) String() string { return answerText[a] }

// Input is what changes from reading to reading.
type Input struct {
	Pressure    unit.Pascal // in the core, absolute
	Temperature unit.Kelvin // of the fibre
	Energy      unit.Joule  // in the fibre
	Air         unit.Fraction
}

// Verdict is one limit beside a prediction.
type Verdict struct {
	Name        string // such as "soliton order"
	Value       float64
	Bound       float64
	Unit        string // of Value and Bound; empty where dimensionless
	OK          bool
	Consequence string // one line, said where OK is false
}

const (
	// MaxZeroDispersion bounds the zero-dispersion wavelengths of one prediction.
	MaxZeroDispersion = 8
	// MaxVerdicts bounds the limits beside one prediction.
	MaxVerdicts = 12
	// MaxBranches bounds the lobes that one prediction can name.
	MaxBranches = 4
)

// Prediction is what the model says of one Input. It is a value without
// pointers to scratch: copying it is safe and allocates nothing.
type Prediction struct {
	Input  Input
	Answer Answer
	Valid  bool   // false: the model has no answer at all here, see Why
	Why    string // why there is no answer, or no emission

	Density                unit.MolePerCubicMetre
	IndexMinusOne          float64 // of the gas at the pump
	EffectiveIndexMinusOne float64 // of the mode at the pump
	Beta1                  float64 // s/m, at the pump
	Beta2                  float64 // s²/m
	Beta3                  float64 // s³/m

	ZeroDispersion      [MaxZeroDispersion]unit.Metre // ascending
	ZeroDispersionCount int

	EffectiveArea    float64 // m²
	N2               unit.SquareMetrePerWatt
	Gamma            float64 // 1/(W m)
	PeakPower        unit.Watt
	SolitonOrder     float64
	DispersionLength unit.Metre
	FissionLength    unit.Metre

	Emission     unit.Metre // centroid, vacuum; 0 where there is none
	Peak         unit.Metre // of the spectrum; known where Answer is Anchored, else 0
	Sigma        unit.Metre // standard uncertainty of Emission
	Extrapolated bool       // index source beyond its checked range

	// Calibration is the name of the one that corrected the emission, empty
	// where none did; Beyond says that the input lies outside the range in
	// which it was made.
	Calibration string
	Beyond      bool

	// Kappa is the nonlinear part of phase matching that was used, in 1/m.
	Kappa float64
	// IonisedFraction is a rough guess for the compressed pulse.
	IonisedFraction unit.Fraction

	Branches    [MaxBranches]Branch // strongest first
	BranchCount int

	Verdicts     [MaxVerdicts]Verdict
	VerdictCount int
}

// Branch is one lobe that the source may emit. Conversion is zero where the
// answer does not know it.
type Branch struct {
	Emission   unit.Metre
	Conversion unit.Fraction // of the output energy
}

// CurvePoint is one point of the predicted emission over pressure.
type CurvePoint struct {
	Pressure unit.Pascal
	Emission unit.Metre // 0 where none is predicted
	Sigma    unit.Metre
	// Others are further lobes that the source may emit, strongest first; 0
	// where there are no more.
	Others [MaxBranches - 1]unit.Metre
	Beyond bool // outside the range of the calibration in use
}

// Point returns the prediction as a point of a curve.
func (p *Prediction) Point() CurvePoint {
	c := CurvePoint{Pressure: p.Input.Pressure, Emission: p.Emission, Sigma: p.Sigma, Beyond: p.Beyond}
	for i := 1; i < min(p.BranchCount, MaxBranches); i++ {
		c.Others[i-1] = p.Branches[i].Emission
	}
	return c
}
