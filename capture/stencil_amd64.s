#include "go_asm.h"
#include "textflag.h"

DATA tens<>+0(SB)/8, $0x010a010a010a010a
DATA tens<>+8(SB)/8, $0x010a010a010a010a
GLOBL tens<>(SB), RODATA|NOPTR, $16

DATA hundreds<>+0(SB)/8, $0x0001006400010064
DATA hundreds<>+8(SB)/8, $0x0001006400010064
GLOBL hundreds<>(SB), RODATA|NOPTR, $16

DATA myriads<>+0(SB)/8, $0x0001271000012710
DATA myriads<>+8(SB)/8, $0x0001271000012710
GLOBL myriads<>(SB), RODATA|NOPTR, $16

DATA eights<>+0(SB)/8, $0x4197d78400000000 // 1e8
DATA eights<>+8(SB)/8, $0x3ff0000000000000 // 1
GLOBL eights<>(SB), RODATA|NOPTR, $16

DATA zeros<>+0(SB)/8, $0x3030303030303030
DATA zeros<>+8(SB)/8, $0x3030303030303030
GLOBL zeros<>(SB), RODATA|NOPTR, $16

// func readFitting(l *rowLayout, text *byte, most int) int
TEXT ·readFitting(SB), NOSPLIT, $0-32
	MOVQ    l+0(FP), AX
	MOVQ    text+8(FP), SI
	MOVQ    most+16(FP), CX
	MOVQ    rowLayout_length(AX), R12
	MOVQ    rowLayout_blocks(AX), R13
	MOVQ    rowLayout_numbers(AX), BX
	VMOVDQU zeros<>(SB), X10
	VMOVDQU tens<>(SB), X11
	VMOVDQU hundreds<>(SB), X12
	VMOVDQU myriads<>(SB), X13
	VMOVUPD eights<>(SB), X14
	XORQ    DX, DX

row:
	CMPQ DX, CX
	JGE  done
	MOVQ R13, R8
	MOVQ (rowLayout_blocks+8)(AX), R9
	MOVQ SI, R10

block: // what no longer is what it must be is above its limit
	VMOVDQU  (R10), Y0
	VPXOR    rowBlock_fixed(R8), Y0, Y0
	VPSUBUSB rowBlock_limit(R8), Y0, Y0
	VPTEST   Y0, Y0
	JNZ      done
	ADDQ     $const_blockBytes, R10
	ADDQ     $rowBlock__size, R8
	DECQ     R9
	JNZ      block

	MOVQ BX, R8
	MOVQ (rowLayout_numbers+8)(AX), R9

number: // sixteen digits become eight pairs, four fours, two eights
	MOVQ       numeral_at(R8), R10
	VMOVDQU    (SI)(R10*1), X0
	VPXOR      X10, X0, X0
	VPSHUFB    numeral_pick(R8), X0, X0
	VPMADDUBSW X11, X0, X0
	VPMADDWD   X12, X0, X0
	VPACKUSDW  X0, X0, X0
	VPMADDWD   X13, X0, X0
	VCVTDQ2PD  X0, X0
	VMULPD     X14, X0, X0
	VUNPCKHPD  X0, X0, X1
	VADDSD     X1, X0, X0
	VMULSD     numeral_times(R8), X0, X0
	VDIVSD     numeral_over(R8), X0, X0
	VMOVQ      numeral_sign(R8), X1
	VPOR       X1, X0, X0
	MOVQ       numeral_to(R8), R10
	VMOVSD     X0, (R10)(DX*8)
	ADDQ       $numeral__size, R8
	DECQ       R9
	JNZ        number

	INCQ DX
	ADDQ R12, SI
	JMP  row

done:
	VZEROUPPER
	MOVQ DX, ret+24(FP)
	RET
