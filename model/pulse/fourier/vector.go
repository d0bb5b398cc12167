package fourier

// Vectors reports whether plans of at least leastVector samples use the vector
// instructions of the processor: AVX2 with FMA on amd64. Programs built with
// the tag purego never do.
func Vectors() bool { return vectors() }

// leastVector is the shortest complex transform that fills the registers.
const leastVector = 16

// planes carries out the passes of a complex transform four samples at a time.
// In between real and imaginary parts stand in arrays of their own.
type planes struct {
	n      int
	first  []float64   // twiddle factors of the pass of stride 1, in blocks of 4
	middle [][]float64 // of the passes of stride 4, 16, …
	last   int         // radix of the last pass
	re, im [2][]float64
}

// apart keeps the arrays off each other's cache sets: at a power of two all
// streams of a pass would meet in one.
const apart = 24

func newPlanes(n int, stages []stage, last int) *planes {
	p := &planes{n: n, last: last, first: blocks(stages[0].twiddle)}
	for _, st := range stages[1:] {
		p.middle = append(p.middle, flat(st.twiddle))
	}
	all := make([]float64, 4*(n+apart))
	for i := range 2 {
		p.re[i], p.im[i] = all[:n], all[n+apart:][:n]
		all = all[2*(n+apart):]
	}
	return p
}

// laneOrder is how unpacking four complex numbers leaves them in a register.
var laneOrder = [4]int{0, 2, 1, 3}

// blocks lays the twiddle factors of four groups out as registers load them.
func blocks(twiddle []triple) []float64 {
	w := make([]float64, 0, 6*len(twiddle))
	for p := 0; p < len(twiddle); p += 4 {
		w = append(w, lanes(func(i int) complex128 { return twiddle[p+i].w1 })...)
		w = append(w, lanes(func(i int) complex128 { return twiddle[p+i].w2 })...)
		w = append(w, lanes(func(i int) complex128 { return twiddle[p+i].w3 })...)
	}
	return w
}

// lanes returns the real parts, then the imaginary parts, of four numbers.
func lanes(at func(i int) complex128) []float64 {
	w := make([]float64, 8)
	for lane, i := range laneOrder {
		w[lane], w[4+lane] = real(at(i)), imag(at(i))
	}
	return w
}

func flat(twiddle []triple) []float64 {
	w := make([]float64, 0, 6*len(twiddle))
	for _, t := range twiddle {
		w = append(w, real(t.w1), imag(t.w1), real(t.w2), imag(t.w2), real(t.w3), imag(t.w3))
	}
	return w
}

// forward transforms src to dst, both of length n; they may be the same.
func (p *planes) forward(dst, src []complex128) {
	begin4(&p.re[0][0], &p.im[0][0], &src[0], &p.first[0], p.n)
	now, stride := 0, 4
	for _, w := range p.middle {
		to := 1 - now
		middle4(&p.re[to][0], &p.im[to][0], &p.re[now][0], &p.im[now][0], &w[0], p.n, stride)
		now, stride = to, stride*4
	}
	if p.last == 4 {
		end4(&dst[0], &p.re[now][0], &p.im[now][0], p.n)
	} else {
		end8(&dst[0], &p.re[now][0], &p.im[now][0], p.n)
	}
}
