package pulse

// Constants of nature, CODATA 2018 (Rev. Mod. Phys. 93, 025010 (2021)).
const (
	lightSpeed       = 299792458.0      // m/s, exact
	vacuumPermit     = 8.8541878128e-12 // F/m
	elementaryCharge = 1.602176634e-19  // C, exact
	avogadro         = 6.02214076e23    // 1/mol, exact
	electronMass     = 9.1093837015e-31 // kg
)
