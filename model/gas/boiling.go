package gas

import "math"

// boiling is a point of the saturation line.
type boiling struct{ t, p float64 } // K, Pa

// boilingPressure returns the saturation pressure at t from points ascending in
// temperature: ln p is interpolated in 1/T by a parabola through the nearest
// three points, good to 0.01 %.
func boilingPressure(line []boiling, t float64) float64 {
	i := 1
	for i < len(line)-2 && line[i].t < t {
		i++
	}
	x := 1 / t
	x0, x1, x2 := 1/line[i-1].t, 1/line[i].t, 1/line[i+1].t
	y0, y1, y2 := math.Log(line[i-1].p), math.Log(line[i].p), math.Log(line[i+1].p)
	return math.Exp(y0*(x-x1)*(x-x2)/((x0-x1)*(x0-x2)) +
		y1*(x-x0)*(x-x2)/((x1-x0)*(x1-x2)) +
		y2*(x-x0)*(x-x1)/((x2-x0)*(x2-x1)))
}
