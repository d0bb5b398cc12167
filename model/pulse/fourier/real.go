package fourier

import "fmt"

// Real transforms real signals of one length by a complex transform of half
// that length; Van Loan (1992), section 4.3.
type Real struct {
	half    *Complex
	pack    []complex128
	twiddle []complex128 // exp(−2πi k/n), k = 0 … n/4
}

// NewReal plans transforms of n samples, n a power of two of at least 8.
func NewReal(n int) (*Real, error) {
	if n < 8 || n&(n-1) != 0 {
		return nil, fmt.Errorf("transform of %d samples: want a power of two of at least 8", n)
	}
	half, err := NewComplex(n / 2)
	if err != nil {
		return nil, err
	}
	r := &Real{half: half, pack: make([]complex128, n/2), twiddle: make([]complex128, n/4+1)}
	for k := range r.twiddle {
		r.twiddle[k] = root(k, n)
	}
	return r, nil
}

// Len returns the number of samples that the plan transforms.
func (r *Real) Len() int { return 2 * r.half.n }

// Forward writes the bins 0 … n/2 of the transform of x, of length n = Len,
// to dst, of length n/2+1. x is not changed.
func (r *Real) Forward(dst []complex128, x []float64) {
	m := r.half.n
	x = x[:2*m]
	z := r.pack
	for k := range z {
		z[k] = complex(x[2*k], x[2*k+1])
	}
	r.half.Forward(z)
	dst = dst[:m+1]
	dst[0] = complex(real(z[0])+imag(z[0]), 0)
	dst[m] = complex(real(z[0])-imag(z[0]), 0)
	for k := 1; k <= m/2; k++ {
		a, b := z[k], conj(z[m-k])
		even, odd := a+b, (a-b)*r.twiddle[k]
		odd = complex(imag(odd), -real(odd))
		dst[k] = scale(0.5, even+odd)
		dst[m-k] = scale(0.5, conj(even-odd))
	}
}

// Inverse writes the inverse transform, times n = Len, of the bins 0 … n/2 in
// src, of length n/2+1, to x, of length n. The imaginary parts of the first
// and the last bin count as zero. src is not changed.
func (r *Real) Inverse(x []float64, src []complex128) {
	m := r.half.n
	src = src[:m+1]
	z := r.pack
	z[0] = complex(real(src[0])-real(src[m]), real(src[0])+real(src[m])) // parts exchanged, see swap
	for k := 1; k <= m/2; k++ {
		a, b := src[k], conj(src[m-k])
		even, odd := a+b, (a-b)*conj(r.twiddle[k])
		odd = complex(-imag(odd), real(odd))
		u, v := even+odd, conj(even-odd)
		z[k] = complex(imag(u), real(u))
		z[m-k] = complex(imag(v), real(v))
	}
	r.half.Forward(z)
	x = x[:2*m]
	for k, v := range z {
		x[2*k], x[2*k+1] = imag(v), real(v)
	}
}

func conj(z complex128) complex128 { return complex(real(z), -imag(z)) }

func scale(f float64, z complex128) complex128 { return complex(f*real(z), f*imag(z)) }
