//go:build amd64 && !purego

#include "textflag.h"

// Four complex numbers stand in two registers, their real parts in one and
// their imaginary parts in the other. Operands are in Go's order:
// VSUBPD b, a, d is d = a − b.

DATA half<>+0(SB)/8, $0.5
GLOBL half<>(SB), RODATA|NOPTR, $8
DATA halfRoot<>+0(SB)/8, $0.70710678118654752440
GLOBL halfRoot<>(SB), RODATA|NOPTR, $8

// TURN puts (r, i) times the twiddle factor (wr, wi) into (tr, ti).
#define TURN(r, i, wr, wi, tr, ti) \
	VMULPD      wi, i, tr; \
	VFMSUB231PD wr, r, tr; \
	VMULPD      wr, i, ti; \
	VFMADD231PD wi, r, ti

// DIFFER loads two places, and leaves their difference in d and their sum in s.
#define DIFFER(p, q, d, s) \
	VMOVUPD p, d; \
	VADDPD  q, d, s; \
	VSUBPD  q, d, d

// CROSS ends the butterfly of a, b, c and d.
// In: Y0 a−c, Y1 a+c, Y2 b−d, Y3 b+d; their imaginary parts in Y4 to Y7.
// Out: Y8, Y9 the first result; Y10, Y11 the second; Y1, Y5 the third; Y0, Y4
// the fourth.
#define CROSS \
	VADDPD Y3, Y1, Y8; \
	VADDPD Y7, Y5, Y9; \
	VSUBPD Y3, Y1, Y1; \
	VSUBPD Y7, Y5, Y5; \
	VADDPD Y6, Y0, Y10; \
	VSUBPD Y2, Y4, Y11; \
	VSUBPD Y6, Y0, Y0; \
	VADDPD Y2, Y4, Y4

// GROUPED stores four results of four indices so that those of one index stand
// together. Lanes hold the indices 0, 2, 1, 3, as unpacking leaves them.
#define GROUPED(o0, o1, o2, o3, to) \
	VUNPCKLPD  o1, o0, Y0; \
	VUNPCKHPD  o1, o0, Y1; \
	VUNPCKLPD  o3, o2, Y10; \
	VUNPCKHPD  o3, o2, Y11; \
	VPERM2F128 $0x20, Y10, Y0, Y12; \
	VPERM2F128 $0x31, Y10, Y0, Y13; \
	VPERM2F128 $0x20, Y11, Y1, Y14; \
	VPERM2F128 $0x31, Y11, Y1, Y15; \
	VMOVUPD    Y12, (to); \
	VMOVUPD    Y13, 32(to); \
	VMOVUPD    Y14, 64(to); \
	VMOVUPD    Y15, 96(to)

// WOVEN stores four complex numbers, whose lanes are in order, at to and 32
// bytes on. It overwrites r and i.
#define WOVEN(r, i, t0, t1, to, on) \
	VUNPCKLPD  i, r, t0; \
	VUNPCKHPD  i, r, t1; \
	VPERM2F128 $0x20, t1, t0, r; \
	VPERM2F128 $0x31, t1, t0, i; \
	VMOVUPD    r, to; \
	VMOVUPD    i, on

// func begin4(re, im *float64, x *complex128, w *float64, n int)
TEXT ·begin4(SB), NOSPLIT, $0-40
	MOVQ re+0(FP), DI
	MOVQ im+8(FP), SI
	MOVQ x+16(FP), AX
	MOVQ w+24(FP), R8
	MOVQ n+32(FP), R9
	MOVQ R9, R10
	SHLQ $2, R10            // bytes in a quarter of x
	LEAQ (R10)(R10*2), R11
	SHRQ $4, R9

begin4loop:
	DIFFER((AX), (AX)(R10*2), Y2, Y0)
	DIFFER(32(AX), 32(AX)(R10*2), Y3, Y1)
	DIFFER((AX)(R10*1), (AX)(R11*1), Y6, Y4)
	DIFFER(32(AX)(R10*1), 32(AX)(R11*1), Y7, Y5)
	VADDPD    Y4, Y0, Y8    // first result, parts still side by side
	VADDPD    Y5, Y1, Y9
	VSUBPD    Y4, Y0, Y0    // third
	VSUBPD    Y5, Y1, Y1
	VUNPCKLPD Y9, Y8, Y4    // real parts of 0, 2, 1, 3
	VUNPCKHPD Y9, Y8, Y5    // imaginary parts
	VUNPCKLPD Y1, Y0, Y8
	VUNPCKHPD Y1, Y0, Y9
	VUNPCKLPD Y3, Y2, Y0
	VUNPCKHPD Y3, Y2, Y1
	VUNPCKLPD Y7, Y6, Y2
	VUNPCKHPD Y7, Y6, Y3
	VADDPD    Y3, Y0, Y6    // second
	VSUBPD    Y2, Y1, Y7
	VSUBPD    Y3, Y0, Y0    // fourth
	VADDPD    Y2, Y1, Y1
	VMOVUPD   (R8), Y10
	VMOVUPD   32(R8), Y11
	VMOVUPD   64(R8), Y12
	VMOVUPD   96(R8), Y13
	VMOVUPD   128(R8), Y14
	VMOVUPD   160(R8), Y15
	TURN(Y6, Y7, Y10, Y11, Y2, Y3)
	TURN(Y8, Y9, Y12, Y13, Y6, Y7)
	TURN(Y0, Y1, Y14, Y15, Y8, Y9)
	GROUPED(Y4, Y2, Y6, Y8, DI)
	GROUPED(Y5, Y3, Y7, Y9, SI)
	ADDQ      $64, AX
	ADDQ      $192, R8
	ADDQ      $128, DI
	ADDQ      $128, SI
	DECQ      R9
	JNZ       begin4loop
	VZEROUPPER
	RET

// func middle4(toRe, toIm, re, im, w *float64, n, stride int)
TEXT ·middle4(SB), NOSPLIT, $0-56
	MOVQ toRe+0(FP), AX
	MOVQ toIm+8(FP), BX
	MOVQ re+16(FP), SI
	MOVQ im+24(FP), DI
	MOVQ w+32(FP), R8
	MOVQ n+40(FP), R10
	MOVQ stride+48(FP), R12
	SHLQ $1, R10            // bytes in a quarter of a plane
	LEAQ (R10)(R10*2), R11
	LEAQ (SI)(R10*1), DX    // where the first quarter ends
	SHLQ $3, R12            // bytes in a group
	LEAQ (R12)(R12*2), R13

middle4group:
	VBROADCASTSD (R8), Y12
	VBROADCASTSD 8(R8), Y13
	VBROADCASTSD 16(R8), Y14
	VBROADCASTSD 24(R8), Y15
	MOVQ         R12, R9

middle4loop:
	DIFFER((SI), (SI)(R10*2), Y0, Y1)
	DIFFER((SI)(R10*1), (SI)(R11*1), Y2, Y3)
	DIFFER((DI), (DI)(R10*2), Y4, Y5)
	DIFFER((DI)(R10*1), (DI)(R11*1), Y6, Y7)
	CROSS
	VMOVUPD      Y8, (AX)
	VMOVUPD      Y9, (BX)
	TURN(Y10, Y11, Y12, Y13, Y2, Y3)
	VMOVUPD      Y2, (AX)(R12*1)
	VMOVUPD      Y3, (BX)(R12*1)
	TURN(Y1, Y5, Y14, Y15, Y6, Y7)
	VMOVUPD      Y6, (AX)(R12*2)
	VMOVUPD      Y7, (BX)(R12*2)
	VBROADCASTSD 32(R8), Y8
	VBROADCASTSD 40(R8), Y9
	TURN(Y0, Y4, Y8, Y9, Y2, Y3)
	VMOVUPD      Y2, (AX)(R13*1)
	VMOVUPD      Y3, (BX)(R13*1)
	ADDQ         $32, SI
	ADDQ         $32, DI
	ADDQ         $32, AX
	ADDQ         $32, BX
	SUBQ         $32, R9
	JNZ          middle4loop
	ADDQ         R13, AX
	ADDQ         R13, BX
	ADDQ         $48, R8
	CMPQ         SI, DX
	JNE          middle4group
	VZEROUPPER
	RET

// func end4(x *complex128, re, im *float64, n int)
TEXT ·end4(SB), NOSPLIT, $0-32
	MOVQ x+0(FP), AX
	MOVQ re+8(FP), SI
	MOVQ im+16(FP), DI
	MOVQ n+24(FP), R9
	MOVQ R9, R10
	SHLQ $1, R10            // bytes in a quarter of a plane
	LEAQ (R10)(R10*2), R11
	MOVQ R9, R12
	SHLQ $2, R12            // bytes in a quarter of x
	LEAQ (R12)(R12*2), R13
	SHRQ $4, R9

end4loop:
	DIFFER((SI), (SI)(R10*2), Y0, Y1)
	DIFFER((SI)(R10*1), (SI)(R11*1), Y2, Y3)
	DIFFER((DI), (DI)(R10*2), Y4, Y5)
	DIFFER((DI)(R10*1), (DI)(R11*1), Y6, Y7)
	CROSS
	WOVEN(Y8, Y9, Y12, Y13, (AX), 32(AX))
	WOVEN(Y10, Y11, Y14, Y15, (AX)(R12*1), 32(AX)(R12*1))
	WOVEN(Y1, Y5, Y2, Y3, (AX)(R12*2), 32(AX)(R12*2))
	WOVEN(Y0, Y4, Y6, Y7, (AX)(R13*1), 32(AX)(R13*1))
	ADDQ $64, AX
	ADDQ $32, SI
	ADDQ $32, DI
	DECQ R9
	JNZ  end4loop
	VZEROUPPER
	RET

// Eight inputs a to h do not fit into the registers: the sums of those four
// apart give the even results, then their differences, read again, the odd.

// func end8(x *complex128, re, im *float64, n int)
TEXT ·end8(SB), NOSPLIT, $0-32
	MOVQ         x+0(FP), AX
	MOVQ         re+8(FP), SI
	MOVQ         im+16(FP), DI
	MOVQ         n+24(FP), R9
	MOVQ         R9, R10            // bytes in an eighth of a plane
	LEAQ         (R10)(R10*2), R11
	LEAQ         (SI)(R10*4), CX    // e to h
	LEAQ         (DI)(R10*4), DX
	LEAQ         (AX)(R9*2), BX     // the odd results
	MOVQ         R9, R12
	SHLQ         $2, R12            // bytes in a quarter of x
	LEAQ         (R12)(R12*2), R13
	SHRQ         $5, R9
	VBROADCASTSD halfRoot<>(SB), Y15

end8loop:
	VMOVUPD (SI), Y8
	VADDPD  (CX), Y8, Y8
	VMOVUPD (SI)(R10*2), Y9
	VADDPD  (CX)(R10*2), Y9, Y9
	DIFFER(Y8, Y9, Y0, Y1)
	VMOVUPD (SI)(R10*1), Y8
	VADDPD  (CX)(R10*1), Y8, Y8
	VMOVUPD (SI)(R11*1), Y9
	VADDPD  (CX)(R11*1), Y9, Y9
	DIFFER(Y8, Y9, Y2, Y3)
	VMOVUPD (DI), Y8
	VADDPD  (DX), Y8, Y8
	VMOVUPD (DI)(R10*2), Y9
	VADDPD  (DX)(R10*2), Y9, Y9
	DIFFER(Y8, Y9, Y4, Y5)
	VMOVUPD (DI)(R10*1), Y8
	VADDPD  (DX)(R10*1), Y8, Y8
	VMOVUPD (DI)(R11*1), Y9
	VADDPD  (DX)(R11*1), Y9, Y9
	DIFFER(Y8, Y9, Y6, Y7)
	CROSS
	WOVEN(Y8, Y9, Y2, Y3, (AX), 32(AX))
	WOVEN(Y10, Y11, Y6, Y7, (AX)(R12*1), 32(AX)(R12*1))
	WOVEN(Y1, Y5, Y2, Y3, (AX)(R12*2), 32(AX)(R12*2))
	WOVEN(Y0, Y4, Y6, Y7, (AX)(R13*1), 32(AX)(R13*1))

	// b−f times (1−i)/√2 into Y12, Y13
	VMOVUPD (SI)(R10*1), Y0
	VSUBPD  (CX)(R10*1), Y0, Y0
	VMOVUPD (DI)(R10*1), Y1
	VSUBPD  (DX)(R10*1), Y1, Y1
	VADDPD  Y1, Y0, Y12
	VSUBPD  Y0, Y1, Y13
	VMULPD  Y15, Y12, Y12
	VMULPD  Y15, Y13, Y13

	// d−h times −(1+i)/√2 into Y8, −Y9
	VMOVUPD (SI)(R11*1), Y0
	VSUBPD  (CX)(R11*1), Y0, Y0
	VMOVUPD (DI)(R11*1), Y1
	VSUBPD  (DX)(R11*1), Y1, Y1
	VSUBPD  Y0, Y1, Y8
	VADDPD  Y1, Y0, Y9
	VMULPD  Y15, Y8, Y8
	VMULPD  Y15, Y9, Y9
	VSUBPD  Y8, Y12, Y2
	VADDPD  Y8, Y12, Y3
	VADDPD  Y9, Y13, Y6
	VSUBPD  Y9, Y13, Y7

	// a−e, and c−g times −i
	VMOVUPD (SI), Y8
	VSUBPD  (CX), Y8, Y8
	VMOVUPD (DI), Y9
	VSUBPD  (DX), Y9, Y9
	VMOVUPD (SI)(R10*2), Y10
	VSUBPD  (CX)(R10*2), Y10, Y10
	VMOVUPD (DI)(R10*2), Y11
	VSUBPD  (DX)(R10*2), Y11, Y11
	VSUBPD  Y11, Y8, Y0
	VADDPD  Y11, Y8, Y1
	VADDPD  Y10, Y9, Y4
	VSUBPD  Y10, Y9, Y5
	CROSS
	WOVEN(Y8, Y9, Y2, Y3, (BX), 32(BX))
	WOVEN(Y10, Y11, Y6, Y7, (BX)(R12*1), 32(BX)(R12*1))
	WOVEN(Y1, Y5, Y2, Y3, (BX)(R12*2), 32(BX)(R12*2))
	WOVEN(Y0, Y4, Y6, Y7, (BX)(R13*1), 32(BX)(R13*1))
	ADDQ    $64, AX
	ADDQ    $64, BX
	ADDQ    $32, SI
	ADDQ    $32, DI
	ADDQ    $32, CX
	ADDQ    $32, DX
	DECQ    R9
	JNZ     end8loop
	VZEROUPPER
	RET

// FOLDED loads bins a from up on and bins b from down on backwards, and leaves
// a + b* in Y4, Y5 and a − b* in Y6, Y7. Lanes hold the bins 0, 2, 1, 3.
#define FOLDED(up, down) \
	VMOVUPD   (up), Y4; \
	VMOVUPD   32(up), Y5; \
	VUNPCKLPD Y5, Y4, Y0; \
	VUNPCKHPD Y5, Y4, Y1; \
	VPERMPD   $0x4e, -16(down), Y4; \
	VPERMPD   $0x4e, -48(down), Y5; \
	VUNPCKLPD Y5, Y4, Y2; \
	VUNPCKHPD Y5, Y4, Y3; \
	VADDPD    Y2, Y0, Y4; \
	VSUBPD    Y3, Y1, Y5; \
	VSUBPD    Y2, Y0, Y6; \
	VADDPD    Y3, Y1, Y7

// UNFOLDED stores Y0, Y1 from up on and Y2, Y3 from down on backwards.
#define UNFOLDED(up, down) \
	VUNPCKLPD Y1, Y0, Y4; \
	VUNPCKHPD Y1, Y0, Y5; \
	VUNPCKLPD Y3, Y2, Y6; \
	VUNPCKHPD Y3, Y2, Y7; \
	VPERMPD   $0x4e, Y6, Y6; \
	VPERMPD   $0x4e, Y7, Y7; \
	VMOVUPD   Y4, (up); \
	VMOVUPD   Y5, 32(up); \
	VMOVUPD   Y6, -16(down); \
	VMOVUPD   Y7, -48(down)

// func part(dst, z *complex128, w *float64, n int)
TEXT ·part(SB), NOSPLIT, $0-32
	MOVQ         dst+0(FP), DI
	MOVQ         z+8(FP), AX
	MOVQ         w+16(FP), R8
	MOVQ         n+24(FP), R9
	MOVQ         R9, R10
	SHLQ         $4, R10
	LEAQ         -16(AX)(R10*1), CX
	LEAQ         -16(DI)(R10*1), SI
	ADDQ         $16, AX
	ADDQ         $16, DI
	SHRQ         $3, R9
	VBROADCASTSD half<>(SB), Y14
	VXORPD       Y15, Y15, Y15
	VSUBPD       Y14, Y15, Y15

partloop:
	FOLDED(AX, CX)
	VMOVUPD (R8), Y10
	VMOVUPD 32(R8), Y11
	TURN(Y6, Y7, Y10, Y11, Y8, Y9)
	VADDPD  Y9, Y4, Y0
	VSUBPD  Y8, Y5, Y1
	VSUBPD  Y9, Y4, Y2
	VADDPD  Y8, Y5, Y3
	VMULPD  Y14, Y0, Y0
	VMULPD  Y14, Y1, Y1
	VMULPD  Y14, Y2, Y2
	VMULPD  Y15, Y3, Y3
	UNFOLDED(DI, SI)
	ADDQ    $64, AX
	ADDQ    $64, DI
	SUBQ    $64, CX
	SUBQ    $64, SI
	ADDQ    $64, R8
	DECQ    R9
	JNZ     partloop
	VZEROUPPER
	RET

// func merge(z, src *complex128, w *float64, n int)
TEXT ·merge(SB), NOSPLIT, $0-32
	MOVQ z+0(FP), DI
	MOVQ src+8(FP), AX
	MOVQ w+16(FP), R8
	MOVQ n+24(FP), R9
	MOVQ R9, R10
	SHLQ $4, R10
	LEAQ -16(AX)(R10*1), CX
	LEAQ -16(DI)(R10*1), SI
	ADDQ $16, AX
	ADDQ $16, DI
	SHRQ $3, R9

mergeloop:
	FOLDED(AX, CX)
	VMOVUPD (R8), Y10
	VMOVUPD 32(R8), Y11

	// times the conjugate of the twiddle factor
	VMULPD       Y11, Y7, Y8
	VFMADD231PD  Y10, Y6, Y8
	VMULPD       Y10, Y7, Y9
	VFNMADD231PD Y11, Y6, Y9
	VADDPD       Y9, Y4, Y0
	VSUBPD       Y5, Y8, Y1
	VSUBPD       Y9, Y4, Y2
	VADDPD       Y8, Y5, Y3
	UNFOLDED(DI, SI)
	ADDQ         $64, AX
	ADDQ         $64, DI
	SUBQ         $64, CX
	SUBQ         $64, SI
	ADDQ         $64, R8
	DECQ         R9
	JNZ          mergeloop
	VZEROUPPER
	RET
