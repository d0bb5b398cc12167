package pulse

// The embedded pair of orders 5 and 4 with the first stage the same as the
// last: Dormand & Prince, J. Comput. Appl. Math. 6, 19 (1980).
const stages = 7

// stageAt is where along the step each stage stands.
var stageAt = [stages]float64{0, 1.0 / 5, 3.0 / 10, 4.0 / 5, 8.0 / 9, 1, 1}

// stageFrom holds the weights of the earlier slopes in each stage. The last
// row is the fifth-order result.
var stageFrom = [stages][stages - 1]float64{
	{},
	{1.0 / 5},
	{3.0 / 40, 9.0 / 40},
	{44.0 / 45, -56.0 / 15, 32.0 / 9},
	{19372.0 / 6561, -25360.0 / 2187, 64448.0 / 6561, -212.0 / 729},
	{9017.0 / 3168, -355.0 / 33, 46732.0 / 5247, 49.0 / 176, -5103.0 / 18656},
	{35.0 / 384, 0, 500.0 / 1113, 125.0 / 192, -2187.0 / 6784, 11.0 / 84},
}

// stageError is the difference between the results of order 5 and 4.
var stageError = [stages]float64{
	71.0 / 57600, 0, -71.0 / 16695, 71.0 / 1920, -17253.0 / 339200, 22.0 / 525, -1.0 / 40,
}
