package gas

// xenonEquation is the reference equation of state of xenon.
//
// Source: E. W. Lemmon, R. Span, J. Chem. Eng. Data 51, 785-850 (2006),
// doi:10.1021/je050186n.
var xenonEquation = equation{
	source: "lemmon-2006",
	r:      8.314472,
	tRed:   289.733,
	rhoRed: 8400,
	power: []powerTerm{
		{0.83115, 0.25, 1, 0},
		{-2.3553, 1.125, 1, 0},
		{0.53904, 1.5, 1, 0},
		{0.014382, 1.375, 2, 0},
		{0.066309, 0.25, 3, 0},
		{0.00019649, 0.875, 7, 0},
		{0.14996, 0.625, 2, 1},
		{-0.035319, 1.75, 5, 1},
		{-0.15929, 3.625, 1, 2},
		{-0.027521, 3.625, 4, 2},
		{-0.023305, 14.5, 3, 3},
		{0.0086941, 12, 4, 3},
	},
}
