package taylor

import "math"

// Number is C0 + C1·s + C2·s² + C3·s³. Four plain fields, so that the compiler
// keeps it in registers.
type Number struct{ C0, C1, C2, C3 float64 }

// Constant returns v, which does not change with frequency.
func Constant(v float64) Number { return Number{C0: v} }

// Frequency returns ω = omega·(1+s).
func Frequency(omega float64) Number { return Number{C0: omega, C1: omega} }

// Square returns x·(1+s)², a quantity that goes with the square of frequency.
func Square(x float64) Number { return Number{C0: x, C1: 2 * x, C2: x} }

// Add returns a+b.
func (a Number) Add(b Number) Number {
	return Number{a.C0 + b.C0, a.C1 + b.C1, a.C2 + b.C2, a.C3 + b.C3}
}

// Sub returns a−b.
func (a Number) Sub(b Number) Number {
	return Number{a.C0 - b.C0, a.C1 - b.C1, a.C2 - b.C2, a.C3 - b.C3}
}

// Plus returns a+k for a constant k.
func (a Number) Plus(k float64) Number { a.C0 += k; return a }

// Times returns k·a for a constant k.
func (a Number) Times(k float64) Number { return Number{k * a.C0, k * a.C1, k * a.C2, k * a.C3} }

// Mul returns a·b.
func (a Number) Mul(b Number) Number {
	return Number{
		a.C0 * b.C0,
		a.C0*b.C1 + a.C1*b.C0,
		a.C0*b.C2 + a.C1*b.C1 + a.C2*b.C0,
		a.C0*b.C3 + a.C1*b.C2 + a.C2*b.C1 + a.C3*b.C0,
	}
}

// Inverse returns 1/a. It is infinite or not a number where a.C0 is zero:
// callers keep away from poles.
func (a Number) Inverse() Number {
	v := 1 / a.C0
	c1 := -v * (a.C1 * v)
	c2 := -v * (a.C1*c1 + a.C2*v)
	c3 := -v * (a.C1*c2 + a.C2*c1 + a.C3*v)
	return Number{v, c1, c2, c3}
}

// Over returns a/b.
func (a Number) Over(b Number) Number { return a.Mul(b.Inverse()) }

// Sqrt returns √a for a.C0 > 0.
func (a Number) Sqrt() Number {
	r := math.Sqrt(a.C0)
	h := 0.5 / r
	c1 := a.C1 * h
	c2 := (a.C2 - c1*c1) * h
	c3 := (a.C3 - 2*c1*c2) * h
	return Number{r, c1, c2, c3}
}

// SinCos returns sin a and cos a.
func (a Number) SinCos() (sin, cos Number) {
	s, c := math.Sincos(a.C0)
	sin.C0, cos.C0 = s, c
	sin.C1, cos.C1 = a.C1*c, -a.C1*s
	sin.C2 = (a.C1*cos.C1 + 2*a.C2*c) / 2
	cos.C2 = -(a.C1*sin.C1 + 2*a.C2*s) / 2
	sin.C3 = (a.C1*cos.C2 + 2*a.C2*cos.C1 + 3*a.C3*c) / 3
	cos.C3 = -(a.C1*sin.C2 + 2*a.C2*sin.C1 + 3*a.C3*s) / 3
	return sin, cos
}

// SqrtMinusOne returns √(1+a) − 1 without losing the digits of a small a.
func (a Number) SqrtMinusOne() Number { return a.Over(a.Plus(1).Sqrt().Plus(1)) }

// Derivatives returns value and the first three derivatives with respect to ω
// at the frequency omega that the number was built about.
func (a Number) Derivatives(omega float64) (d0, d1, d2, d3 float64) {
	v := 1 / omega
	return a.C0, a.C1 * v, 2 * a.C2 * v * v, 6 * a.C3 * v * v * v
}
