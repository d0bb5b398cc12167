package drift

import "time"

// changed returns when the values left their mean: where a step, or a line
// that rises from the mean, takes away most of the sum of squares. Samples
// ascend in time. Where they left it before the first, that is what it returns.
func changed(samples []Sample, mean float64) time.Duration {
	n := len(samples)
	if n == 0 {
		return 0
	}
	at, most := samples[n-1].At, 0.0
	// Sums from each place to the end: of the distance d from the mean, of
	// the time u since the first value, and of their products.
	var d, u, du, uu, count float64
	for k := n - 1; k >= 0; k-- {
		t, v := (samples[k].At - samples[0].At).Seconds(), samples[k].Value-mean
		d, u, du, uu, count = d+v, u+t, du+v*t, uu+t*t, count+1
		if step := d * d / count; step > most {
			at, most = samples[k].At, step
		}
		rise, run := du-t*d, uu-2*t*u+count*t*t
		if run > 0 && rise*rise/run > most {
			at, most = samples[k].At, rise*rise/run
		}
	}
	return at
}
