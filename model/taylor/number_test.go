package taylor

import (
	"math"
	"testing"
)

// Closed forms at x = 1.7(1+s): derivatives of elementary functions are on
// paper, no other program needed.
func TestClosedForms(t *testing.T) {
	const x = 1.7
	f := Frequency(x)
	sin, cos := f.SinCos()
	tests := []struct {
		name           string
		got            Number
		d0, d1, d2, d3 float64
	}{
		{"1/x", f.Inverse(), 1 / x, -1 / (x * x), 2 / (x * x * x), -6 / (x * x * x * x)},
		{"sqrt x", f.Sqrt(), math.Sqrt(x), 0.5 * math.Pow(x, -0.5), -0.25 * math.Pow(x, -1.5), 0.375 * math.Pow(x, -2.5)},
		{"x^3", f.Mul(f).Mul(f), x * x * x, 3 * x * x, 6 * x, 6},
		{"sin x", sin, math.Sin(x), math.Cos(x), -math.Sin(x), -math.Cos(x)},
		{"cos x", cos, math.Cos(x), -math.Sin(x), -math.Cos(x), math.Sin(x)},
		{"square", Square(x * x), x * x, 2 * x, 2, 0},
		{"sqrt(1+x)-1", f.SqrtMinusOne(), math.Sqrt(1+x) - 1, 0.5 * math.Pow(1+x, -0.5), -0.25 * math.Pow(1+x, -1.5), 0.375 * math.Pow(1+x, -2.5)},
		{"3x+2 over x", f.Times(3).Plus(2).Over(f), 3 + 2/x, -2 / (x * x), 4 / (x * x * x), -12 / (x * x * x * x)},
		{"x - constant", f.Sub(Constant(1)).Add(Constant(3)), x + 2, 1, 0, 0},
	}
	for _, test := range tests {
		d0, d1, d2, d3 := test.got.Derivatives(x)
		for k, pair := range [][2]float64{{d0, test.d0}, {d1, test.d1}, {d2, test.d2}, {d3, test.d3}} {
			if math.Abs(pair[0]-pair[1]) > 1e-14*(1+math.Abs(pair[1])) {
				t.Errorf("%s: derivative %d is %.17g, closed form %.17g", test.name, k, pair[0], pair[1])
			}
		}
	}
}

// A composition of everything: sin²+cos² = 1 and (√a)² = a to every order.
func TestIdentities(t *testing.T) {
	a := Number{0.8, -1.3, 0.4, 2.1}
	sin, cos := a.SinCos()
	one := sin.Mul(sin).Add(cos.Mul(cos))
	back := a.Sqrt().Mul(a.Sqrt())
	unity := a.Mul(a.Inverse())
	for _, test := range []struct {
		name      string
		got, want Number
	}{{"sin²+cos²", one, Constant(1)}, {"sqrt²", back, a}, {"a/a", unity, Constant(1)}} {
		d := test.got.Sub(test.want)
		for _, v := range []float64{d.C0, d.C1, d.C2, d.C3} {
			if math.Abs(v) > 1e-13 {
				t.Errorf("%s: %v, want %v", test.name, test.got, test.want)
				break
			}
		}
	}
}
