package gas

// xenonBoiling is the saturation line of xenonEquation, worked out from it by
// the equal-area rule (maxwell_test.go does so again). Xenon is the one gas
// here that condenses in a laboratory.
var xenonBoiling = [...]boiling{
	{250, 2.4228783e6}, {255, 2.7382359e6}, {260, 3.0820433e6}, {265, 3.4560645e6},
	{270, 3.8623119e6}, {275, 4.3031891e6}, {280, 4.7817760e6}, {283.15, 5.1045517e6},
	{285, 5.3025360e6}, {287, 5.5242592e6}, {288, 5.6383940e6}, {289, 5.7549376e6},
	{289.6, 5.8260857e6}, {289.733, 5.842e6},
}
