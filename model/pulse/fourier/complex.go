package fourier

import (
	"fmt"
	"math"
	"math/bits"
	"slices"
)

// Complex transforms complex signals of one length.
type Complex struct {
	n       int
	stages  []stage
	last    int // radix of the last stage, which needs no twiddle factors
	scratch [2][]complex128
	planes  *planes // nil where the passes are plain
}

// stage is one radix-4 pass: groups of stride elements, a triple of twiddle
// factors per group.
type stage struct {
	stride  int
	twiddle []triple
}

type triple struct{ w1, w2, w3 complex128 }

// NewComplex plans transforms of n samples, n a power of two of at least 4.
func NewComplex(n int) (*Complex, error) { return newComplex(n, vectors()) }

func newComplex(n int, vectors bool) (*Complex, error) {
	if n < 4 || n&(n-1) != 0 {
		return nil, fmt.Errorf("transform of %d samples: want a power of two of at least 4", n)
	}
	c := &Complex{n: n, last: 4}
	if bits.TrailingZeros(uint(n))%2 == 1 {
		c.last = 8
	}
	for length, stride := n, 1; length > c.last; length, stride = length/4, stride*4 {
		c.stages = append(c.stages, stage{stride, twiddles(length)})
	}
	if vectors && n >= leastVector {
		c.planes = newPlanes(n, c.stages, c.last)
		return c, nil
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
	c.forward(x, x)
}

// Inverse overwrites x, of length Len, with its inverse transform times Len:
// it is the forward one with time running backwards.
func (c *Complex) Inverse(x []complex128) {
	c.Forward(x)
	slices.Reverse(x[1:c.n])
}

// forward transforms src to dst, which may be the same.
func (c *Complex) forward(dst, src []complex128) {
	if c.planes != nil {
		c.planes.forward(dst, src)
		return
	}
	for i, st := range c.stages {
		to := c.scratch[i%2]
		pass4(to, src, st)
		src = to
	}
	if len(c.stages) == 0 {
		copy(c.scratch[0], src)
		src = c.scratch[0]
	}
	if c.last == 4 {
		last4(dst, src)
	} else {
		last8(dst, src)
	}
}
