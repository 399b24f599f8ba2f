//go:build amd64 && !purego

#include "textflag.h"

// Registers: DI prev, SI cur (its first value is the left neighbour), CX points
// left, Y14 d, Y15 a. Multiply and add stay apart, as in the Go twin.

// CELLS4 advances four points; OLD keeps the values that are overwritten.
#define CELLS4(at, L, U, W, OLD) \
	VMOVUPD at(SI), L \
	VMOVUPD (at+8)(SI), U \
	VMOVUPD at(DI), OLD \
	VADDPD (at+16)(SI), L, L \
	VADDPD U, U, W \
	VSUBPD W, L, L \
	VMULPD Y15, L, L \
	VSUBPD OLD, U, W \
	VMULPD Y14, W, W \
	VADDPD W, U, U \
	VADDPD L, U, U \
	VMOVUPD U, at(DI)

// CELL1 advances one point, next value in X1, old one in X3.
#define CELL1 \
	VMOVSD (SI), X0 \
	VMOVSD 8(SI), X1 \
	VMOVSD (DI), X3 \
	VADDSD 16(SI), X0, X0 \
	VADDSD X1, X1, X2 \
	VSUBSD X2, X0, X0 \
	VMULSD X15, X0, X0 \
	VSUBSD X3, X1, X2 \
	VMULSD X14, X2, X2 \
	VADDSD X2, X1, X1 \
	VADDSD X0, X1, X1 \
	VMOVSD X1, (DI)

// func advanceAVX2(prev, cur *float64, n int, d, a float64)
TEXT ·advanceAVX2(SB), NOSPLIT, $0-40
	MOVQ prev+0(FP), DI
	MOVQ cur+8(FP), SI
	MOVQ n+16(FP), CX
	VBROADCASTSD d+24(FP), Y14
	VBROADCASTSD a+32(FP), Y15
	SUBQ $16, CX
	JL   rest
sixteen:
	CELLS4(0, Y0, Y1, Y2, Y3)
	CELLS4(32, Y4, Y5, Y6, Y7)
	CELLS4(64, Y8, Y9, Y10, Y11)
	CELLS4(96, Y0, Y1, Y2, Y3)
	ADDQ $128, SI
	ADDQ $128, DI
	SUBQ $16, CX
	JGE  sixteen
rest:
	ADDQ $12, CX
	JL   ones
four:
	CELLS4(0, Y0, Y1, Y2, Y3)
	ADDQ $32, SI
	ADDQ $32, DI
	SUBQ $4, CX
	JGE  four
ones:
	ADDQ $4, CX
	JLE  done
one:
	CELL1
	ADDQ $8, SI
	ADDQ $8, DI
	DECQ CX
	JNZ  one
done:
	VZEROUPPER
	RET

// func advanceLossyAVX2(prev, cur *float64, n int, d, a float64, sums *float64)
TEXT ·advanceLossyAVX2(SB), NOSPLIT, $0-48
	MOVQ prev+0(FP), DI
	MOVQ cur+8(FP), SI
	MOVQ n+16(FP), CX
	MOVQ sums+40(FP), DX
	VBROADCASTSD d+24(FP), Y14
	VBROADCASTSD a+32(FP), Y15
	VMOVUPD (DX), Y12
	VMOVUPD 32(DX), Y13
	SUBQ $8, CX
	JL   store
eight:
	CELLS4(0, Y0, Y1, Y2, Y3)
	CELLS4(32, Y4, Y5, Y6, Y7)
	VSUBPD Y3, Y1, Y1
	VSUBPD Y7, Y5, Y5
	VMULPD Y1, Y1, Y1
	VMULPD Y5, Y5, Y5
	VADDPD Y1, Y12, Y12
	VADDPD Y5, Y13, Y13
	ADDQ $64, SI
	ADDQ $64, DI
	SUBQ $8, CX
	JGE  eight
store:
	VMOVUPD Y12, (DX)
	VMOVUPD Y13, 32(DX)
	ADDQ $8, CX
	JLE  end
single:
	CELL1
	VSUBSD X3, X1, X1
	VMULSD X1, X1, X1
	VADDSD (DX), X1, X1
	VMOVSD X1, (DX)
	ADDQ $8, SI
	ADDQ $8, DI
	ADDQ $8, DX
	DECQ CX
	JNZ  single
end:
	VZEROUPPER
	RET
