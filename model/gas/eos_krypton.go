package gas

// kryptonEquation is the reference equation of state of krypton.
//
// Source: E. W. Lemmon, R. Span, J. Chem. Eng. Data 51, 785-850 (2006),
// doi:10.1021/je050186n.
var kryptonEquation = equation{
	source: "lemmon-2006",
	r:      8.314472,
	tRed:   209.48,
	rhoRed: 10850,
	power: []powerTerm{
		{0.83561, 0.25, 1, 0},
		{-2.3725, 1.125, 1, 0},
		{0.54567, 1.5, 1, 0},
		{0.014361, 1.375, 2, 0},
		{0.066502, 0.25, 3, 0},
		{0.0001931, 0.875, 7, 0},
		{0.16818, 0.625, 2, 1},
		{-0.033133, 1.75, 5, 1},
		{-0.15008, 3.625, 1, 2},
		{-0.022897, 3.625, 4, 2},
		{-0.021454, 14.5, 3, 3},
		{0.0069397, 12, 4, 3},
	},
}
