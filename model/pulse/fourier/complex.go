package fourier

import (
	"fmt"
	"math"
	"math/bits"
)

// Complex transforms complex signals of one length.
type Complex struct {
	n       int
	stages  []stage
	last    int // radix of the last stage, which needs no twiddle factors
	scratch [2][]complex128
}

// stage is one radix-4 pass: groups of stride elements, a triple of twiddle
// factors per group.
type stage struct {
	stride  int
	twiddle []triple
}

type triple struct{ w1, w2, w3 complex128 }

// NewComplex plans transforms of n samples, n a power of two of at least 4.
func NewComplex(n int) (*Complex, error) {
	if n < 4 || n&(n-1) != 0 {
		return nil, fmt.Errorf("transform of %d samples: want a power of two of at least 4", n)
	}
	c := &Complex{n: n, last: 4}
	if bits.TrailingZeros(uint(n))%2 == 1 {
		c.last = 2
	}
	for length, stride := n, 1; length > c.last; length, stride = length/4, stride*4 {
		c.stages = append(c.stages, stage{stride, twiddles(length)})
	}
	c.scratch[0] = make([]complex128, n)
	c.scratch[1] = make([]complex128, n)
	return c, nil
}

func twiddles(length int) []triple {
	t := make([]triple, length/4)
	for p := range t {
		t[p] = triple{root(p, length), root(2*p, length), root(3*p, length)}
	}
	return t
}

// root returns exp(−2πi k/n).
func root(k, n int) complex128 {
	s, c := math.Sincos(2 * math.Pi * float64(k) / float64(n))
	return complex(c, -s)
}

// Len returns the number of samples that the plan transforms.
func (c *Complex) Len() int { return c.n }

// Forward overwrites x, of length Len, with its transform.
func (c *Complex) Forward(x []complex128) {
	x = x[:c.n]
	in := x
	for i, st := range c.stages {
		out := c.scratch[i%2]
		pass4(out, in, st)
		in = out
	}
	if len(c.stages) == 0 {
		copy(c.scratch[0], x)
		in = c.scratch[0]
	}
	if c.last == 4 {
		last4(x, in)
	} else {
		last2(x, in)
	}
}

// Inverse overwrites x, of length Len, with its inverse transform times Len.
func (c *Complex) Inverse(x []complex128) {
	x = x[:c.n]
	swap(x)
	c.Forward(x)
	swap(x)
}

// swap exchanges real and imaginary parts: the inverse transform is the
// forward one between two such exchanges.
func swap(x []complex128) {
	for i, v := range x {
		x[i] = complex(imag(v), real(v))
	}
}

// pass4 carries out one radix-4 pass of stride at least 1.
func pass4(y, x []complex128, st stage) {
	s, quarter := st.stride, len(x)/4
	switch s {
	case 1:
		first4(y, x, st.twiddle)
		return
	case 4:
		second4(y, x, st.twiddle)
		return
	}
	for p, w := range st.twiddle {
		a := x[s*p : s*p+s]
		b := x[s*p+quarter:][:len(a)]
		c := x[s*p+2*quarter:][:len(a)]
		d := x[s*p+3*quarter:][:len(a)]
		o := y[4*s*p:]
		o0, o1, o2, o3 := o[:len(a)], o[s:][:len(a)], o[2*s:][:len(a)], o[3*s:][:len(a)]
		for q := range a {
			ac, am := a[q]+c[q], a[q]-c[q]
			bd, bm := b[q]+d[q], b[q]-d[q]
			jb := complex(imag(bm), -real(bm))
			o0[q] = ac + bd
			o1[q] = (am + jb) * w.w1
			o2[q] = (ac - bd) * w.w2
			o3[q] = (am - jb) * w.w3
		}
	}
}

func first4(y, x []complex128, twiddle []triple) {
	quarter := len(x) / 4
	a := x[:quarter]
	b, c, d := x[quarter:][:len(a)], x[2*quarter:][:len(a)], x[3*quarter:][:len(a)]
	twiddle = twiddle[:len(a)]
	for p := range a {
		o := (*[4]complex128)(y[4*p:])
		w := &twiddle[p]
		ac, am := a[p]+c[p], a[p]-c[p]
		bd, bm := b[p]+d[p], b[p]-d[p]
		jb := complex(imag(bm), -real(bm))
		o[0] = ac + bd
		o[1] = (am + jb) * w.w1
		o[2] = (ac - bd) * w.w2
		o[3] = (am - jb) * w.w3
	}
}

// second4 is the pass of stride 4, spelled out: its groups are too short for
// a loop of their own.
func second4(y, x []complex128, twiddle []triple) {
	quarter := len(x) / 4
	xa, xb, xc, xd := x[:quarter], x[quarter:], x[2*quarter:], x[3*quarter:]
	for p := range twiddle {
		w := &twiddle[p]
		a, b := (*[4]complex128)(xa[4*p:]), (*[4]complex128)(xb[4*p:])
		c, d := (*[4]complex128)(xc[4*p:]), (*[4]complex128)(xd[4*p:])
		o := (*[16]complex128)(y[16*p:])
		for q := range 4 {
			ac, am := a[q]+c[q], a[q]-c[q]
			bd, bm := b[q]+d[q], b[q]-d[q]
			jb := complex(imag(bm), -real(bm))
			o[q] = ac + bd
			o[q+4] = (am + jb) * w.w1
			o[q+8] = (ac - bd) * w.w2
			o[q+12] = (am - jb) * w.w3
		}
	}
}

func last4(y, x []complex128) {
	s := len(x) / 4
	a := x[:s]
	b, c, d := x[s:][:len(a)], x[2*s:][:len(a)], x[3*s:][:len(a)]
	o0, o1, o2, o3 := y[:len(a)], y[s:][:len(a)], y[2*s:][:len(a)], y[3*s:][:len(a)]
	for q := range a {
		ac, am := a[q]+c[q], a[q]-c[q]
		bd, bm := b[q]+d[q], b[q]-d[q]
		jb := complex(imag(bm), -real(bm))
		o0[q], o1[q], o2[q], o3[q] = ac+bd, am+jb, ac-bd, am-jb
	}
}

func last2(y, x []complex128) {
	s := len(x) / 2
	a := x[:s]
	b := x[s:][:len(a)]
	o0, o1 := y[:len(a)], y[s:][:len(a)]
	for q := range a {
		o0[q], o1[q] = a[q]+b[q], a[q]-b[q]
	}
}
