package drift

import "math"

// usual are threshold and limit of the usual chart, with a slack of half a
// standard deviation and a weight of 0.1, for false alarms once in 10 to 1e9
// values, two to the decade: ThresholdCUSUM and LimitEWMA, which take a tenth
// of a second. A chart is made while somebody waits.
var usual = [...]struct{ threshold, limit float64 }{
	{1.4574, 0.9797}, {2.4326, 1.5747}, {3.5022, 2.1479}, {4.6199, 2.6408}, {5.7584, 3.0597}, {6.9055, 3.4248},
	{8.0563, 3.7514}, {9.2087, 4.0495}, {10.3621, 4.3258}, {11.5164, 4.5847}, {12.6714, 4.8291}, {13.8272, 5.0615},
	{14.9840, 5.2835}, {16.1417, 5.4964}, {17.3004, 5.7013}, {18.4603, 5.8991}, {19.6213, 6.0904},
}

const usualSlack, usualLambda = 0.5, 0.1

// design returns the threshold of the sums and the limit of the average at
// which false alarms come once in so many values on average.
func design(slack, lambda, values float64) (threshold, limit float64, err error) {
	if slack == usualSlack && lambda == usualLambda && values >= 10 && values <= 1e9 {
		x := 2 * (math.Log10(values) - 1)
		first := min(max(int(x)-1, 0), len(usual)-4)
		for i := range 4 { // cubic through four neighbours
			w := 1.0
			for j := range 4 {
				if j != i {
					w *= (x - float64(first+j)) / float64(i-j)
				}
			}
			threshold += w * usual[first+i].threshold
			limit += w * usual[first+i].limit
		}
		return threshold, limit, nil
	}
	if threshold, err = ThresholdCUSUM(slack, values); err != nil {
		return 0, 0, err
	}
	limit, err = LimitEWMA(lambda, values)
	return threshold, limit, err
}
