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

// func dotWide(x, y []float64) float64
TEXT ·dotWide(SB), NOSPLIT, $0-56
	MOVQ x_base+0(FP), SI
	MOVQ x_len+8(FP), CX
	MOVQ y_base+24(FP), DI
	VXORPD Y0, Y0, Y0
	VXORPD Y1, Y1, Y1

dot8:
	CMPQ CX, $8
	JLT  dotSum
	VMOVUPD (SI), Y2
	VMOVUPD 32(SI), Y3
	VMULPD (DI), Y2, Y2
	VMULPD 32(DI), Y3, Y3
	VADDPD Y2, Y0, Y0
	VADDPD Y3, Y1, Y1
	ADDQ $64, SI
	ADDQ $64, DI
	SUBQ $8, CX
	JMP  dot8

dotSum:
	VADDPD Y1, Y0, Y0
	VEXTRACTF128 $1, Y0, X1  // s2, s3
	VUNPCKHPD X0, X0, X2     // s1
	VUNPCKHPD X1, X1, X3     // s3

dot1:
	TESTQ CX, CX
	JE    dotDone
	VMOVSD (SI), X4
	VMULSD (DI), X4, X4
	VADDSD X4, X0, X0
	ADDQ $8, SI
	ADDQ $8, DI
	DECQ CX
	JMP  dot1

dotDone:
	VADDSD X2, X0, X0
	VADDSD X3, X1, X1
	VADDSD X1, X0, X0
	VMOVSD X0, ret+48(FP)
	VZEROUPPER
	RET

// func addScaledWide(dst []float64, f float64, x []float64)
TEXT ·addScaledWide(SB), NOSPLIT, $0-56
	MOVQ dst_base+0(FP), DI
	MOVQ dst_len+8(FP), CX
	VBROADCASTSD f+24(FP), Y0
	MOVQ x_base+32(FP), SI

add8:
	CMPQ CX, $8
	JLT  add1
	VMULPD (SI), Y0, Y1
	VMULPD 32(SI), Y0, Y2
	VADDPD (DI), Y1, Y1
	VADDPD 32(DI), Y2, Y2
	VMOVUPD Y1, (DI)
	VMOVUPD Y2, 32(DI)
	ADDQ $64, SI
	ADDQ $64, DI
	SUBQ $8, CX
	JMP  add8

add1:
	TESTQ CX, CX
	JE    addDone
	VMULSD (SI), X0, X1
	VADDSD (DI), X1, X1
	VMOVSD X1, (DI)
	ADDQ $8, SI
	ADDQ $8, DI
	DECQ CX
	JMP  add1

addDone:
	VZEROUPPER
	RET

// func addScaled4Wide(dst []float64, f0, f1, f2, f3 float64, x0, x1, x2, x3 []float64)
TEXT ·addScaled4Wide(SB), NOSPLIT, $0-152
	MOVQ dst_base+0(FP), DI
	MOVQ dst_len+8(FP), CX
	VBROADCASTSD f0+24(FP), Y0
	VBROADCASTSD f1+32(FP), Y1
	VBROADCASTSD f2+40(FP), Y2
	VBROADCASTSD f3+48(FP), Y3
	MOVQ x0_base+56(FP), R8
	MOVQ x1_base+80(FP), R9
	MOVQ x2_base+104(FP), R10
	MOVQ x3_base+128(FP), R11
	XORQ AX, AX

four4:
	CMPQ CX, $4
	JLT  four1
	VMULPD (R8)(AX*8), Y0, Y4
	VMULPD (R9)(AX*8), Y1, Y5
	VMULPD (R10)(AX*8), Y2, Y6
	VMULPD (R11)(AX*8), Y3, Y7
	VADDPD Y5, Y4, Y4
	VADDPD Y7, Y6, Y6
	VADDPD Y6, Y4, Y4
	VADDPD (DI)(AX*8), Y4, Y4
	VMOVUPD Y4, (DI)(AX*8)
	ADDQ $4, AX
	SUBQ $4, CX
	JMP  four4

four1:
	TESTQ CX, CX
	JE    fourDone
	VMULSD (R8)(AX*8), X0, X4
	VMULSD (R9)(AX*8), X1, X5
	VMULSD (R10)(AX*8), X2, X6
	VMULSD (R11)(AX*8), X3, X7
	VADDSD X5, X4, X4
	VADDSD X7, X6, X6
	VADDSD X6, X4, X4
	VADDSD (DI)(AX*8), X4, X4
	VMOVSD X4, (DI)(AX*8)
	INCQ AX
	DECQ CX
	JMP  four1

fourDone:
	VZEROUPPER
	RET

DATA absolute<>+0(SB)/8, $0x7fffffffffffffff
GLOBL absolute<>(SB), RODATA|NOPTR, $8
DATA infinity<>+0(SB)/8, $0x7ff0000000000000
GLOBL infinity<>(SB), RODATA|NOPTR, $8

// func extremesWide(row, col []float64) (low, high float64)
// A product of zero takes part in low as an infinity.
TEXT ·extremesWide(SB), NOSPLIT, $0-64
	MOVQ row_base+0(FP), SI
	MOVQ row_len+8(FP), CX
	MOVQ col_base+24(FP), DI
	VBROADCASTSD absolute<>(SB), Y15
	VBROADCASTSD infinity<>(SB), Y14
	VXORPD Y13, Y13, Y13
	VMOVAPD Y14, Y0 // low
	VMOVAPD Y14, Y1
	VXORPD Y2, Y2, Y2 // high
	VXORPD Y3, Y3, Y3

ext8:
	CMPQ CX, $8
	JLT  extFold
	VANDPD (SI), Y15, Y4
	VANDPD 32(SI), Y15, Y5
	VMULPD (DI), Y4, Y4
	VMULPD 32(DI), Y5, Y5
	VMAXPD Y4, Y2, Y2
	VMAXPD Y5, Y3, Y3
	VCMPPD $0, Y13, Y4, Y6
	VCMPPD $0, Y13, Y5, Y7
	VBLENDVPD Y6, Y14, Y4, Y4
	VBLENDVPD Y7, Y14, Y5, Y5
	VMINPD Y4, Y0, Y0
	VMINPD Y5, Y1, Y1
	ADDQ $64, SI
	ADDQ $64, DI
	SUBQ $8, CX
	JMP  ext8

extFold:
	VMINPD Y1, Y0, Y0
	VMAXPD Y3, Y2, Y2
	VEXTRACTF128 $1, Y0, X1
	VEXTRACTF128 $1, Y2, X3
	VMINPD X1, X0, X0
	VMAXPD X3, X2, X2
	VUNPCKHPD X0, X0, X1
	VUNPCKHPD X2, X2, X3
	VMINSD X1, X0, X0
	VMAXSD X3, X2, X2

ext1:
	TESTQ CX, CX
	JE    extDone
	VMOVSD (SI), X4
	VANDPD X15, X4, X4
	VMULSD (DI), X4, X4
	VMAXSD X4, X2, X2
	VCMPPD $0, X13, X4, X6
	VBLENDVPD X6, X14, X4, X4
	VMINSD X4, X0, X0
	ADDQ $8, SI
	ADDQ $8, DI
	DECQ CX
	JMP  ext1

extDone:
	VMOVSD X0, low+48(FP)
	VMOVSD X2, high+56(FP)
	VZEROUPPER
	RET

// func noteColumnsWide(row []float64, factor float64, small, large []float64)
TEXT ·noteColumnsWide(SB), NOSPLIT, $0-80
	MOVQ row_base+0(FP), SI
	MOVQ row_len+8(FP), CX
	VBROADCASTSD factor+24(FP), Y0
	MOVQ small_base+32(FP), DI
	MOVQ large_base+56(FP), DX
	VBROADCASTSD absolute<>(SB), Y15
	VBROADCASTSD infinity<>(SB), Y14
	VXORPD Y13, Y13, Y13

note4:
	CMPQ CX, $4
	JLT  note1
	VANDPD (SI), Y15, Y4
	VMULPD Y0, Y4, Y4
	VMAXPD (DX), Y4, Y5
	VMOVUPD Y5, (DX)
	VCMPPD $0, Y13, Y4, Y6
	VBLENDVPD Y6, Y14, Y4, Y4
	VMINPD (DI), Y4, Y5
	VMOVUPD Y5, (DI)
	ADDQ $32, SI
	ADDQ $32, DI
	ADDQ $32, DX
	SUBQ $4, CX
	JMP  note4

note1:
	TESTQ CX, CX
	JE    noteDone
	VMOVSD (SI), X4
	VANDPD X15, X4, X4
	VMULSD X0, X4, X4
	VMAXSD (DX), X4, X5
	VMOVSD X5, (DX)
	VCMPPD $0, X13, X4, X6
	VBLENDVPD X6, X14, X4, X4
	VMINSD (DI), X4, X5
	VMOVSD X5, (DI)
	ADDQ $8, SI
	ADDQ $8, DI
	ADDQ $8, DX
	DECQ CX
	JMP  note1

noteDone:
	VZEROUPPER
	RET
