package fibre

import (
	"fmt"
	"math"
)

// Family is the polarisation of a mode.
type Family uint8

const (
	HE Family = iota + 1
	EH
	TE
	TM
)

var familyText = [...]string{"", "HE", "EH", "TE", "TM"}

// Mode is a mode of a hollow bore: family, azimuthal and radial order.
type Mode struct {
	Family            Family
	Azimuthal, Radial int
}

// HE11 is the fundamental mode.
var HE11 = Mode{HE, 1, 1}

// String returns such as "HE11".
func (m Mode) String() string {
	if m == (Mode{}) {
		m = HE11
	}
	return fmt.Sprintf("%s%d%d", familyText[m.Family], m.Azimuthal, m.Radial)
}

// ParseMode reads such as "HE12" or "TE01".
func ParseMode(text string) (Mode, error) {
	bad := fmt.Errorf("mode %q is not known: expected such as HE11, HE12, HE21, EH11, TE01, TM01", text)
	if len(text) != 4 {
		return Mode{}, bad
	}
	m := Mode{Azimuthal: int(text[2]) - '0', Radial: int(text[3]) - '0'}
	for i, name := range familyText {
		if i > 0 && name == text[:2] {
			m.Family = Family(i)
		}
	}
	if _, err := m.zero(); err != nil {
		return Mode{}, bad
	}
	return m, nil
}

// order returns the order of the Bessel function whose zero the mode takes:
// J_{n−1} for HE_nm, J_{n+1} for EH_nm, J₁ for TE_0m and TM_0m.
//
// Source: E. A. J. Marcatili, R. A. Schmeltzer, Bell Syst. Tech. J. 43, 1783
// (1964); their EH is today's HE.
func (m Mode) order() int {
	switch m.Family {
	case HE:
		return m.Azimuthal - 1
	case EH:
		return m.Azimuthal + 1
	}
	return 1
}

// zero returns u, the radial-order-th zero of the mode's Bessel function.
func (m Mode) zero() (float64, error) {
	transverse := m.Family == TE || m.Family == TM
	if m.Family < HE || m.Family > TM || m.Radial < 1 || m.Radial > 9 ||
		transverse && m.Azimuthal != 0 || !transverse && (m.Azimuthal < 1 || m.Azimuthal > 9) {
		return 0, fmt.Errorf("mode of family %d, orders %d and %d is not known", m.Family, m.Azimuthal, m.Radial)
	}
	return besselZero(m.order(), m.Radial), nil
}

// besselZero returns the k-th positive zero of J_n: bracketed by steps shorter
// than the distance of two zeros, then bisected to the last bit.
func besselZero(n, k int) float64 {
	const step = 0.5 // zeros are more than 3 apart (DLMF 10.21)
	x := 0.5 + float64(n)
	for seen := 0; ; x += step {
		if (math.Jn(n, x) > 0) != (math.Jn(n, x+step) > 0) {
			if seen++; seen == k {
				break
			}
		}
	}
	lo, hi := x, x+step
	rising := math.Jn(n, hi) > 0
	for range 60 {
		mid := 0.5 * (lo + hi)
		if (math.Jn(n, mid) > 0) == rising {
			hi = mid
		} else {
			lo = mid
		}
	}
	return 0.5 * (lo + hi)
}

// area returns A_eff/a² and the peak intensity over P/A_eff of the mode's
// intensity J_n(ur/a)², by Simpson's rule.
func (m Mode) area(u float64) (share, peak float64) {
	const steps = 2000 // error below 1e-10
	var second, fourth, most float64
	for i := range steps + 1 {
		x := float64(i) / steps
		j := math.Jn(m.order(), u*x)
		weight := 2.0
		switch {
		case i == 0 || i == steps:
			weight = 1
		case i%2 == 1:
			weight = 4
		}
		second += weight * j * j * x
		fourth += weight * j * j * j * j * x
		most = math.Max(most, j*j)
	}
	dx := 2 * math.Pi / (3 * steps)
	second, fourth = second*dx, fourth*dx
	share = second * second / fourth
	return share, most / second * share
}
