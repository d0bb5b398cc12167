package simulate

import "barline/model/unit"

// The panel of Heron, as built. Figures that its bench file states are marked
// so; the rest are those of an ordinary bench, common practice, no source.
const (
	cellVolume     = 60e-6 // m³, stated
	manifoldVolume = 10e-6 // m³
	lineVolume     = 5e-6  // m³, between regulator and needle valve
	cylinder       = 150e5 // Pa
	supply         = 18e5  // Pa, stated: setting of the regulator
	ambient        = 101300.0

	// Sonic conductances with air, m³/(s Pa).
	needleConductance    = 8.5e-11 // about 1 bar/s into both cells
	ventConductance      = 4e-10
	cellValveConductance = 2e-9

	reliefSetting     = 16e5 // Pa, the rating of the cells
	reliefConductance = 2e-9 // more than the needle valve can bring

	regulatorSlope = 1.2e-7 // mol/(s Pa): half a bar of droop at full flow
	pumpSpeed      = 1e-4   // m³/s at the manifold, through its hose
	pumpUltimate   = 0.5    // Pa
	pumpBelow      = 1.2e5  // Pa, stated: the controller opens the pump below

	// Outgassing of one cell with its seals an hour after it was open to air,
	// Pa m³/s; it falls as 1/t.
	outgassing = 1e-6

	fibreRadius = 17e-6  // m, stated
	fibreWall   = 180e-9 // m, stated
	fibreLength = 0.3    // m, stated
	coreCells   = 24

	pumpWavelength = 1030e-9 // m, stated
	pulseDuration  = 35e-15  // s, stated
	pulseEnergy    = 1.3e-6  // J, stated
)

const (
	roomTemperature = 295.15 // K
	bar             = float64(unit.Bar)
)
