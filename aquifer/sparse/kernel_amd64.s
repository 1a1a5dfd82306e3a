#include "textflag.h"

// func cpuid(leaf uint32) (a, b, c, d uint32)
TEXT ·cpuid(SB), NOSPLIT, $0-24
	MOVL leaf+0(FP), AX
	XORL CX, CX
	CPUID
	MOVL AX, a+8(FP)
	MOVL BX, b+12(FP)
	MOVL CX, c+16(FP)
	MOVL DX, d+20(FP)
	RET

// func xgetbv() uint32
TEXT ·xgetbv(SB), NOSPLIT, $0-4
	XORL CX, CX
	XGETBV
	MOVL AX, ret+0(FP)
	RET

// PRODUCT takes the products of (Y8, Y9) with the number at an address from two accumulators.
#define PRODUCT(at, f, t, u, lo, hi) \
	VBROADCASTSD at, f \
	VMULPD Y8, f, t         \
	VMULPD Y9, f, u         \
	VSUBPD t, lo, lo        \
	VSUBPD u, hi, hi

// func updateAVX(c *float64, ldc int, a *float64, lda int, b *float64, m, depth int)
// Four columns of c, m rows, depth > 0. The last rows, where fewer than four, go through masked loads and stores.
TEXT ·updateAVX(SB), NOSPLIT, $0-56
	MOVQ c+0(FP), DI
	MOVQ ldc+8(FP), SI
	MOVQ a+16(FP), R8
	MOVQ lda+24(FP), R9
	MOVQ b+32(FP), R10
	MOVQ m+40(FP), R11
	MOVQ depth+48(FP), R12
	SHLQ $3, SI
	SHLQ $3, R9
	LEAQ (SI)(SI*2), R13

update8:
	CMPQ R11, $8
	JLT  update4
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	VMOVUPD (DI)(SI*1), Y2
	VMOVUPD 32(DI)(SI*1), Y3
	VMOVUPD (DI)(SI*2), Y4
	VMOVUPD 32(DI)(SI*2), Y5
	VMOVUPD (DI)(R13*1), Y6
	VMOVUPD 32(DI)(R13*1), Y7
	MOVQ R8, BX
	MOVQ R10, CX
	MOVQ R12, DX

update8k:
	VMOVUPD (BX), Y8
	VMOVUPD 32(BX), Y9
	PRODUCT(0(CX), Y10, Y11, Y12, Y0, Y1)
	PRODUCT(8(CX), Y13, Y14, Y15, Y2, Y3)
	PRODUCT(16(CX), Y10, Y11, Y12, Y4, Y5)
	PRODUCT(24(CX), Y13, Y14, Y15, Y6, Y7)
	ADDQ R9, BX
	ADDQ $32, CX
	DECQ DX
	JNZ  update8k
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	VMOVUPD Y2, (DI)(SI*1)
	VMOVUPD Y3, 32(DI)(SI*1)
	VMOVUPD Y4, (DI)(SI*2)
	VMOVUPD Y5, 32(DI)(SI*2)
	VMOVUPD Y6, (DI)(R13*1)
	VMOVUPD Y7, 32(DI)(R13*1)
	ADDQ $64, DI
	ADDQ $64, R8
	SUBQ $8, R11
	JMP  update8

update4:
	CMPQ R11, $4
	JLT  updateMasked
	VMOVUPD (DI), Y0
	VMOVUPD (DI)(SI*1), Y2
	VMOVUPD (DI)(SI*2), Y4
	VMOVUPD (DI)(R13*1), Y6
	MOVQ R8, BX
	MOVQ R10, CX
	MOVQ R12, DX

update4k:
	VMOVUPD (BX), Y8
	VBROADCASTSD (CX), Y10
	VBROADCASTSD 8(CX), Y11
	VBROADCASTSD 16(CX), Y12
	VBROADCASTSD 24(CX), Y13
	VMULPD Y8, Y10, Y10
	VMULPD Y8, Y11, Y11
	VMULPD Y8, Y12, Y12
	VMULPD Y8, Y13, Y13
	VSUBPD Y10, Y0, Y0
	VSUBPD Y11, Y2, Y2
	VSUBPD Y12, Y4, Y4
	VSUBPD Y13, Y6, Y6
	ADDQ R9, BX
	ADDQ $32, CX
	DECQ DX
	JNZ  update4k
	VMOVUPD Y0, (DI)
	VMOVUPD Y2, (DI)(SI*1)
	VMOVUPD Y4, (DI)(SI*2)
	VMOVUPD Y6, (DI)(R13*1)

	ADDQ $32, DI
	ADDQ $32, R8
	SUBQ $4, R11

updateMasked:
	TESTQ R11, R11
	JZ    updateDone
	LEAQ  ·rowMasks(SB), AX
	SHLQ  $5, R11
	VMOVUPD (AX)(R11*1), Y14
	VMASKMOVPD (DI), Y14, Y0
	VMASKMOVPD (DI)(SI*1), Y14, Y2
	VMASKMOVPD (DI)(SI*2), Y14, Y4
	VMASKMOVPD (DI)(R13*1), Y14, Y6

updateMaskedk:
	VMASKMOVPD (R8), Y14, Y8
	VBROADCASTSD (R10), Y10
	VBROADCASTSD 8(R10), Y11
	VBROADCASTSD 16(R10), Y12
	VBROADCASTSD 24(R10), Y13
	VMULPD Y8, Y10, Y10
	VMULPD Y8, Y11, Y11
	VMULPD Y8, Y12, Y12
	VMULPD Y8, Y13, Y13
	VSUBPD Y10, Y0, Y0
	VSUBPD Y11, Y2, Y2
	VSUBPD Y12, Y4, Y4
	VSUBPD Y13, Y6, Y6
	ADDQ R9, R8
	ADDQ $32, R10
	DECQ R12
	JNZ  updateMaskedk
	VMASKMOVPD Y0, Y14, (DI)
	VMASKMOVPD Y2, Y14, (DI)(SI*1)
	VMASKMOVPD Y4, Y14, (DI)(SI*2)
	VMASKMOVPD Y6, Y14, (DI)(R13*1)

updateDone:
	VZEROUPPER
	RET

// func forwardAVX(y, l *float64, ld int, x *float64, m, depth int)
// Rows of eight: y[i] -= Σk l[i+ld k] x[k], m a multiple of 4, depth > 0.
TEXT ·forwardAVX(SB), NOSPLIT, $0-48
	MOVQ y+0(FP), DI
	MOVQ l+8(FP), R8
	MOVQ ld+16(FP), R9
	MOVQ x+24(FP), R10
	MOVQ m+32(FP), R11
	MOVQ depth+40(FP), R12
	SHLQ $3, R9

forward4:
	CMPQ R11, $4
	JLT  forwardDone
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	VMOVUPD 64(DI), Y2
	VMOVUPD 96(DI), Y3
	VMOVUPD 128(DI), Y4
	VMOVUPD 160(DI), Y5
	VMOVUPD 192(DI), Y6
	VMOVUPD 224(DI), Y7
	MOVQ R8, CX
	MOVQ R10, BX
	MOVQ R12, DX

forward4k:
	VMOVUPD (BX), Y8
	VMOVUPD 32(BX), Y9
	PRODUCT(0(CX), Y10, Y11, Y12, Y0, Y1)
	PRODUCT(8(CX), Y13, Y14, Y15, Y2, Y3)
	PRODUCT(16(CX), Y10, Y11, Y12, Y4, Y5)
	PRODUCT(24(CX), Y13, Y14, Y15, Y6, Y7)
	ADDQ $64, BX
	ADDQ R9, CX
	DECQ DX
	JNZ  forward4k
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	VMOVUPD Y2, 64(DI)
	VMOVUPD Y3, 96(DI)
	VMOVUPD Y4, 128(DI)
	VMOVUPD Y5, 160(DI)
	VMOVUPD Y6, 192(DI)
	VMOVUPD Y7, 224(DI)
	ADDQ $256, DI
	ADDQ $32, R8
	SUBQ $4, R11
	JMP  forward4

forwardDone:
	VZEROUPPER
	RET

// func backwardAVX(x, l *float64, ld int, y *float64, m int)
// Four rows of eight: x[j] -= Σi l[i+ld j] y[i] for m > 0 rows of y.
TEXT ·backwardAVX(SB), NOSPLIT, $0-40
	MOVQ x+0(FP), DI
	MOVQ l+8(FP), CX
	MOVQ ld+16(FP), R9
	MOVQ y+24(FP), BX
	MOVQ m+32(FP), DX
	SHLQ $3, R9
	LEAQ (R9)(R9*2), R13
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	VMOVUPD 64(DI), Y2
	VMOVUPD 96(DI), Y3
	VMOVUPD 128(DI), Y4
	VMOVUPD 160(DI), Y5
	VMOVUPD 192(DI), Y6
	VMOVUPD 224(DI), Y7

backwardk:
	VMOVUPD (BX), Y8
	VMOVUPD 32(BX), Y9
	PRODUCT(0(CX), Y10, Y11, Y12, Y0, Y1)
	PRODUCT(0(CX)(R9*1), Y13, Y14, Y15, Y2, Y3)
	PRODUCT(0(CX)(R9*2), Y10, Y11, Y12, Y4, Y5)
	PRODUCT(0(CX)(R13*1), Y13, Y14, Y15, Y6, Y7)
	ADDQ $64, BX
	ADDQ $8, CX
	DECQ DX
	JNZ  backwardk
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	VMOVUPD Y2, 64(DI)
	VMOVUPD Y3, 96(DI)
	VMOVUPD Y4, 128(DI)
	VMOVUPD Y5, 160(DI)
	VMOVUPD Y6, 192(DI)
	VMOVUPD Y7, 224(DI)
	VZEROUPPER
	RET

// Masks for 0 to 3 rows.
DATA ·rowMasks+32(SB)/8, $-1
DATA ·rowMasks+64(SB)/8, $-1
DATA ·rowMasks+72(SB)/8, $-1
DATA ·rowMasks+96(SB)/8, $-1
DATA ·rowMasks+104(SB)/8, $-1
DATA ·rowMasks+112(SB)/8, $-1
GLOBL ·rowMasks(SB), RODATA|NOPTR, $128
