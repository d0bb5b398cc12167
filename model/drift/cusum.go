package drift

// CUSUM is a pair of cumulative sums, one for each direction: a value that can
// be copied (NIST/SEMATECH e-Handbook of Statistical Methods, section 6.3.2.3;
// Page, Biometrika 41, 100 (1954), doi:10.1093/biomet/41.1-2.100).
//
//	S⁺ = max(0, S⁺ + x − target − slack),  S⁻ = max(0, S⁻ + target − slack − x)
type CUSUM struct {
	Target    float64
	Slack     float64 // half of the shift that is to be found, in the unit of Target
	Threshold float64 // of either sum
	high, low float64
	sinceHigh int // values since S⁺ was last zero
	sinceLow  int
}

// Add takes the next value and reports whether a sum passed its threshold.
func (c *CUSUM) Add(x float64) (signal bool) {
	c.high, c.sinceHigh = fold(c.high+x-c.Target-c.Slack, c.sinceHigh)
	c.low, c.sinceLow = fold(c.low+c.Target-c.Slack-x, c.sinceLow)
	return c.high > c.Threshold || c.low > c.Threshold
}

func fold(sum float64, since int) (float64, int) {
	if sum > 0 {
		return sum, since + 1
	}
	return 0, 0
}

// Sums returns both sums, neither below zero.
func (c *CUSUM) Sums() (high, low float64) { return c.high, c.low }

// Change estimates what happened: by how much the mean has shifted, and how
// many values ago. It is meaningful while a sum is past its threshold; the
// shift is zero where both are zero.
func (c *CUSUM) Change() (shift float64, values int) {
	switch {
	case c.high >= c.low && c.sinceHigh > 0:
		return c.Slack + c.high/float64(c.sinceHigh), c.sinceHigh
	case c.sinceLow > 0:
		return -c.Slack - c.low/float64(c.sinceLow), c.sinceLow
	}
	return 0, 0
}
