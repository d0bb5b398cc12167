package fibre

import (
	"math"
	"math/cmplx"
	"testing"

	"barline/model/gas"
	"barline/model/unit"
)

// series returns J₀, J₁, Y₀ and Y₁ of a complex number of size 10 or less, by
// their power series (DLMF 10.2.2 and 10.8.1).
func series(z complex128) (j0, j1, y0, y1 complex128) {
	const gamma = 0.5772156649015329
	q := -z * z / 4
	lead := 2 / math.Pi * (cmplx.Log(z/2) + gamma)
	term0, term1 := complex(1, 0), z/2
	harmonic := 0.0
	var tail0, tail1 complex128
	for k := range 60 {
		j0, j1 = j0+term0, j1+term1
		tail0 += term0 * complex(harmonic, 0)
		tail1 += term1 * complex(2*harmonic+1/float64(k+1), 0)
		n := complex(float64(k+1), 0)
		harmonic += 1 / float64(k+1)
		term0 *= q / (n * n)
		term1 *= q / (n * (n + 1))
	}
	y0 = lead*j0 - complex(2/math.Pi, 0)*tail0
	y1 = lead*j1 - complex(2/math.Pi, 0)/z - complex(1/math.Pi, 0)*tail1
	return j0, j1, y0, y1
}

// far returns J_n and Y_n of a large complex number by their asymptotic series
// (DLMF 10.17.3, 10.17.4).
func far(n int, z complex128) (j, y complex128) {
	mu := float64(4 * n * n)
	p, q, term := complex(0, 0), complex(0, 0), complex(1, 0)
	for k := range 8 {
		if k > 0 {
			odd := float64(2*k - 1)
			term *= complex((mu-odd*odd)/(8*float64(k)), 0) / z
		}
		switch k % 4 {
		case 0:
			p += term
		case 1:
			q += term
		case 2:
			p -= term
		case 3:
			q -= term
		}
	}
	chi := z - complex((float64(n)/2+0.25)*math.Pi, 0)
	root := cmplx.Sqrt(2 / (math.Pi * z))
	return root * (p*cmplx.Cos(chi) - q*cmplx.Sin(chi)), root * (p*cmplx.Sin(chi) + q*cmplx.Cos(chi))
}

// tube returns u of the TE₀₁ mode of an empty bore of radius a inside one glass
// wall of thickness t and index n, with empty space outside: Maxwell's
// equations solved exactly in the three layers, H_z and E_φ continuous at both
// surfaces, the wave outside running away.
func tube(k, a, t, n float64) complex128 {
	mismatch := func(u complex128) complex128 {
		core := u / complex(a, 0) // transverse wave number, in and outside
		wall := cmplx.Sqrt(complex(k*k*(n*n-1), 0) + core*core)
		// Outside, at r = a+t.
		j0, j1, y0, y1 := series(core * complex(a+t, 0))
		h, s := j0+1i*y0, (j1+1i*y1)/core
		// The wall's two amplitudes from there.
		fj0, fy0 := far(0, wall*complex(a+t, 0))
		fj1, fy1 := far(1, wall*complex(a+t, 0))
		det := fj0*fy1 - fy0*fj1
		x := (h*fy1 - fy0*s*wall) / det
		y := (fj0*s*wall - h*fj1) / det
		// At r = a.
		fj0, fy0 = far(0, wall*complex(a, 0))
		fj1, fy1 = far(1, wall*complex(a, 0))
		h, s = x*fj0+y*fy0, (x*fj1+y*fy1)/wall
		c0, c1, _, _ := series(u)
		return h*c1/core - s*c0
	}
	u0, u1 := complex(3.83, -1e-3), complex(3.8317, -2e-3)
	f0, f1 := mismatch(u0), mismatch(u1)
	for range 60 {
		if f1 == f0 || cmplx.Abs(u1-u0) < 1e-13 {
			break
		}
		u0, u1, f0 = u1, u1-f1*(u1-u0)/(f1-f0), f1
		f1 = mismatch(u1)
	}
	return u1
}

// The Bessel functions of this check against the standard library's.
func TestBesselOfTheExactTube(t *testing.T) {
	for _, x := range []float64{0.5, 3.83, 7} {
		j0, j1, y0, y1 := series(complex(x, 0))
		for _, pair := range [][2]float64{{real(j0), math.J0(x)}, {real(j1), math.J1(x)}, {real(y0), math.Y0(x)}, {real(y1), math.Y1(x)}} {
			if math.Abs(pair[0]-pair[1]) > 1e-12 {
				t.Errorf("at %g: %.15g, want %.15g", x, pair[0], pair[1])
			}
		}
	}
	for n := range 2 {
		j, y := far(n, 110)
		if math.Abs(real(j)-math.Jn(n, 110)) > 1e-13 || math.Abs(real(y)-math.Yn(n, 110)) > 1e-13 {
			t.Errorf("order %d at 110: %.15g and %.15g, want %.15g and %.15g", n, real(j), real(y), math.Jn(n, 110), math.Yn(n, 110))
		}
	}
}

// The antiresonant form against the exact modes of one thin wall, away from its
// resonances: the wall's part of the effective index within 1.5 %, the leak
// within 7 %.
func TestAgainstExactTube(t *testing.T) {
	s := thin
	s.Mode = Mode{TE, 0, 1}
	g := guide(t, s, gas.Spec{Composition: "argon"}, 0, 293.15)
	a, wall := g.Fibre.Radius(), float64(s.Wall)
	for _, lambda := range []unit.Metre{240e-9, 262e-9, 310e-9, 340e-9, 450e-9, 620e-9, 800e-9, 1030e-9} {
		omega := Frequency(lambda)
		k := omega / c
		n, region := g.IndexMinusOne(omega)
		if region != Guided {
			t.Fatalf("%v: %v", lambda, region)
		}
		u := tube(k, a, wall, glassIndex(float64(lambda)))
		exact := cmplx.Sqrt(1 - u*u/complex(k*k*a*a, 0))
		plain := math.Sqrt(1 - math.Pow(g.Fibre.u/(k*a), 2))
		part, want := 1+n.C0-plain, real(exact)-plain
		leak, wantLeak := g.Leakage(omega), 2*k*imag(exact)
		if math.Abs(part/want-1) > 0.015 || math.Abs(leak/wantLeak-1) > 0.07 {
			t.Errorf("%v: u = %.6f, wall's part %.4g, exact %.4g (%+.1f %%); leak %.4g, exact %.4g 1/m (%+.1f %%)", lambda, u,
				part, want, 100*(part/want-1), leak, wantLeak, 100*(leak/wantLeak-1))
		}
	}
}
