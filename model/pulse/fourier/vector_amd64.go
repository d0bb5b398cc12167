//go:build !purego

package fourier

import "golang.org/x/sys/cpu"

// vectors says whether the processor has the instructions of the vector passes.
func vectors() bool { return cpu.X86.HasAVX2 && cpu.X86.HasFMA }

// begin4 is the radix-4 pass of stride 1 from x, of n samples, n a multiple of
// 16, to the planes re and im. w holds for every four p, in the order 0, 2, 1,
// 3, the real and the imaginary parts of the three twiddle factors.
//
//go:noescape
func begin4(re, im *float64, x *complex128, w *float64, n int)

// middle4 is a radix-4 pass from planes to planes. stride is a multiple of 4;
// w holds real and imaginary part of three twiddle factors for every p.
//
//go:noescape
func middle4(toRe, toIm, re, im, w *float64, n, stride int)

// end4 is the last pass, of stride n/4, from planes to x; n is a multiple of 16.
//
//go:noescape
func end4(x *complex128, re, im *float64, n int)

// end8 is the last pass as one of radix 8; n is a multiple of 32.
//
//go:noescape
func end8(x *complex128, re, im *float64, n int)

// part writes the bins 1 to n−1 of a real signal to dst from the transform z
// of its n pairs, n a multiple of 8. w holds for every four k from 1 to n/2, in
// the order 0, 2, 1, 3, real and imaginary parts of exp(−πi k/n).
//
//go:noescape
func part(dst, z *complex128, w *float64, n int)

// merge undoes part, times 2, and leaves the samples 1 to n−1 in reverse order.
//
//go:noescape
func merge(z, src *complex128, w *float64, n int)
