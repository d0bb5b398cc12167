package fourier

import (
	"fmt"
	"unsafe"
)

// Real transforms real signals of one length by a complex transform of half
// that length; Van Loan (1992), section 4.3.
type Real struct {
	half    *Complex
	pack    []complex128
	twiddle []complex128 // exp(−2πi k/n), k = 0 … n/4
	lanes   []float64    // the same from k = 1 on, as registers load it
}

// NewReal plans transforms of n samples, n a power of two of at least 8.
func NewReal(n int) (*Real, error) { return newReal(n, vectors()) }

// NewPlainReal is NewReal without vector instructions, to compare with.
func NewPlainReal(n int) (*Real, error) { return newReal(n, false) }

func newReal(n int, vectors bool) (*Real, error) {
	if n < 8 || n&(n-1) != 0 {
		return nil, fmt.Errorf("transform of %d samples: want a power of two of at least 8", n)
	}
	half, err := newComplex(n/2, vectors)
	if err != nil {
		return nil, err
	}
	r := &Real{half: half, pack: make([]complex128, n/2), twiddle: make([]complex128, n/4+1)}
	for k := range r.twiddle {
		r.twiddle[k] = root(k, n)
	}
	if half.planes != nil {
		for k := 1; k < len(r.twiddle); k += 4 {
			r.lanes = append(r.lanes, lanes(func(i int) complex128 { return r.twiddle[k+i] })...)
		}
	}
	return r, nil
}

// Len returns the number of samples that the plan transforms.
func (r *Real) Len() int { return 2 * r.half.n }

// pairs returns x as complex numbers of neighbours, in the same memory.
func pairs(x []float64) []complex128 {
	return unsafe.Slice((*complex128)(unsafe.Pointer(unsafe.SliceData(x))), len(x)/2)
}

// Forward writes the bins 0 … n/2 of the transform of x, of length n = Len,
// to dst, of length n/2+1. x is not changed.
func (r *Real) Forward(dst []complex128, x []float64) {
	m := r.half.n
	dst, z := dst[:m+1], r.pack
	r.half.forward(z, pairs(x[:2*m]))
	dst[0] = complex(real(z[0])+imag(z[0]), 0)
	dst[m] = complex(real(z[0])-imag(z[0]), 0)
	if r.lanes != nil {
		part(&dst[0], &z[0], &r.lanes[0], m)
		return
	}
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
	src, z := src[:m+1], r.pack
	// With time running backwards the forward transform is the inverse one.
	z[0] = complex(real(src[0])+real(src[m]), real(src[0])-real(src[m]))
	if r.lanes != nil {
		merge(&z[0], &src[0], &r.lanes[0], m)
	} else {
		for k := 1; k <= m/2; k++ {
			a, b := src[k], conj(src[m-k])
			even, odd := a+b, (a-b)*conj(r.twiddle[k])
			odd = complex(-imag(odd), real(odd))
			z[k], z[m-k] = conj(even-odd), even+odd
		}
	}
	r.half.forward(pairs(x[:2*m]), z)
}

func conj(z complex128) complex128 { return complex(real(z), -imag(z)) }

func scale(f float64, z complex128) complex128 { return complex(f*real(z), f*imag(z)) }
