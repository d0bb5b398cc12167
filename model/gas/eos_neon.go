package gas

// neonEquation is the reference equation of state of neon.
//
// Source: M. Thol, R. Beckmueller, R. Weiss, A. H. Harvey, E. W. Lemmon, R. T. Jacobsen,
// R. Span, properties of neon from the triple point to 700 K at pressures to
// 700 MPa (submitted 2019); coefficients as distributed with CoolProp (MIT
// licence), dev/fluids/Neon.json.
var neonEquation = equation{
	source: "thol-2019",
	r:      8.3144598,
	tRed:   44.4,
	rhoRed: 24100,
	power: []powerTerm{
		{0.031522418, 1.0, 4, 0},
		{3.7716418, 0.431, 1, 0},
		{-4.27399448, 0.592, 1, 0},
		{-0.756466758, 1.105, 2, 0},
		{0.066679921, 0.49, 3, 0},
		{-0.356928434, 2.3, 1, 2},
		{-0.053124761, 3.18, 3, 2},
		{0.9407234, 1.36, 2, 1},
		{-0.969302374, 2.0, 2, 2},
		{0.461243234, 0.5, 4, 1},
		{0.008184422, 1.12, 7, 1},
	},
	bell: []bellTerm{
		{7.84771604, 0.41, 1, 0.76, 0.5775, 0.537, 1.997},
		{6.39604094, 0.64, 1, 2.126, 0.9137, 0.765, 1.782},
		{-1.27480579, 0.579, 3, 2.168, 0.7895, 0.883, 1.663},
		{-5.51887999, 0.6, 2, 2.033, 0.6229, 0.751, 1.837},
		{-8.76652276, 0.52, 1, 0.743, 0.4992, 0.531, 1.953},
		{-0.351732709, 0.655, 2, 4.38, 0.869, 11.4, 1.658},
	},
}
