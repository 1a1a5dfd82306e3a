#include "textflag.h"

// func gatherAVX(y, x *float64, rows *int32, m int)
// Rows of eight: y[i] = x[rows[i]], m > 0.
TEXT ·gatherAVX(SB), NOSPLIT, $0-32
	MOVQ y+0(FP), DI
	MOVQ x+8(FP), SI
	MOVQ rows+16(FP), R8
	MOVQ m+24(FP), DX

gather:
	MOVL (R8), AX
	SHLQ $6, AX
	VMOVUPD (SI)(AX*1), Y0
	VMOVUPD 32(SI)(AX*1), Y1
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	ADDQ $4, R8
	ADDQ $64, DI
	DECQ DX
	JNZ  gather
	VZEROUPPER
	RET

// func scatterAVX(x, y *float64, rows *int32, m int)
// Rows of eight: x[rows[i]] = y[i], m > 0.
TEXT ·scatterAVX(SB), NOSPLIT, $0-32
	MOVQ x+0(FP), SI
	MOVQ y+8(FP), DI
	MOVQ rows+16(FP), R8
	MOVQ m+24(FP), DX

scatter:
	MOVL (R8), AX
	SHLQ $6, AX
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	VMOVUPD Y0, (SI)(AX*1)
	VMOVUPD Y1, 32(SI)(AX*1)
	ADDQ $4, R8
	ADDQ $64, DI
	DECQ DX
	JNZ  scatter
	VZEROUPPER
	RET

// func forwardTriangleAVX(x, l *float64, ld, w int)
// Rows of eight: x[j] /= l[j,j], then x[i] -= l[i,j] x[j] for i > j, for j = 0..w-1, w > 0.
TEXT ·forwardTriangleAVX(SB), NOSPLIT, $0-32
	MOVQ x+0(FP), DI
	MOVQ l+8(FP), SI
	MOVQ ld+16(FP), R9
	MOVQ w+24(FP), DX
	SHLQ $3, R9
	ADDQ $8, R9

forwardColumn:
	VBROADCASTSD (SI), Y2
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	VDIVPD Y2, Y0, Y0
	VDIVPD Y2, Y1, Y1
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	DECQ DX
	JZ   forwardDone
	MOVQ DI, BX
	MOVQ SI, R8
	MOVQ DX, CX

forwardRow:
	ADDQ $64, BX
	ADDQ $8, R8
	VBROADCASTSD (R8), Y2
	VMULPD Y0, Y2, Y3
	VMULPD Y1, Y2, Y4
	VMOVUPD (BX), Y5
	VMOVUPD 32(BX), Y6
	VSUBPD Y3, Y5, Y5
	VSUBPD Y4, Y6, Y6
	VMOVUPD Y5, (BX)
	VMOVUPD Y6, 32(BX)
	DECQ CX
	JNZ  forwardRow
	ADDQ $64, DI
	ADDQ R9, SI
	JMP  forwardColumn

forwardDone:
	VZEROUPPER
	RET

// func backwardTriangleAVX(x, l *float64, ld, w int)
// Rows of eight: x[j] -= l[i,j] x[i] for i > j, then x[j] /= l[j,j], for j = w-1..0, w > 0.
TEXT ·backwardTriangleAVX(SB), NOSPLIT, $0-32
	MOVQ x+0(FP), DI
	MOVQ l+8(FP), SI
	MOVQ ld+16(FP), R9
	MOVQ w+24(FP), DX
	SHLQ $3, R9
	ADDQ $8, R9
	DECQ DX
	MOVQ DX, AX
	SHLQ $6, AX
	ADDQ AX, DI
	MOVQ DX, AX
	IMULQ R9, AX
	ADDQ AX, SI
	XORQ R10, R10

backwardColumn:
	VMOVUPD (DI), Y0
	VMOVUPD 32(DI), Y1
	MOVQ DI, BX
	MOVQ SI, R8
	MOVQ R10, CX
	TESTQ CX, CX
	JZ   backwardPivot

backwardRow:
	ADDQ $64, BX
	ADDQ $8, R8
	VBROADCASTSD (R8), Y2
	VMULPD (BX), Y2, Y3
	VMULPD 32(BX), Y2, Y4
	VSUBPD Y3, Y0, Y0
	VSUBPD Y4, Y1, Y1
	DECQ CX
	JNZ  backwardRow

backwardPivot:
	VBROADCASTSD (SI), Y2
	VDIVPD Y2, Y0, Y0
	VDIVPD Y2, Y1, Y1
	VMOVUPD Y0, (DI)
	VMOVUPD Y1, 32(DI)
	SUBQ $64, DI
	SUBQ R9, SI
	INCQ R10
	DECQ DX
	JGE  backwardColumn
	VZEROUPPER
	RET
