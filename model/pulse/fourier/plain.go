package fourier

import "math"

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

// last8 is the last pass where four do not go into the length: the sums of
// those four apart give the even results, their differences the odd.
func last8(y, x []complex128) {
	s := len(x) / 8
	a := x[:s]
	b, c, d := x[s:][:len(a)], x[2*s:][:len(a)], x[3*s:][:len(a)]
	e, f, g, h := x[4*s:][:len(a)], x[5*s:][:len(a)], x[6*s:][:len(a)], x[7*s:][:len(a)]
	o0, o1, o2, o3 := y[:len(a)], y[s:][:len(a)], y[2*s:][:len(a)], y[3*s:][:len(a)]
	o4, o5, o6, o7 := y[4*s:][:len(a)], y[5*s:][:len(a)], y[6*s:][:len(a)], y[7*s:][:len(a)]
	for q := range a {
		ae, cg := a[q]+e[q], c[q]+g[q]
		bf, dh := b[q]+f[q], d[q]+h[q]
		p, m := ae+cg, ae-cg
		r, n := bf+dh, bf-dh
		jn := complex(imag(n), -real(n))
		o0[q], o2[q], o4[q], o6[q] = p+r, m+jn, p-r, m-jn
		u, v, w, z := a[q]-e[q], b[q]-f[q], c[q]-g[q], d[q]-h[q]
		v = complex(math.Sqrt2/2*(real(v)+imag(v)), math.Sqrt2/2*(imag(v)-real(v)))  // times exp(−πi/4)
		z = complex(math.Sqrt2/2*(imag(z)-real(z)), -math.Sqrt2/2*(real(z)+imag(z))) // times exp(−3πi/4)
		jw := complex(imag(w), -real(w))
		p, m = u+jw, u-jw
		r, n = v+z, v-z
		jn = complex(imag(n), -real(n))
		o1[q], o3[q], o5[q], o7[q] = p+r, m+jn, p-r, m-jn
	}
}
