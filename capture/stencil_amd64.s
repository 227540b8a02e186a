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

// func readFitting(parts []rowPart, text *byte, last, most int) (size, n int)
TEXT ·readFitting(SB), NOSPLIT, $0-64
	MOVQ    parts_base+0(FP), BX
	MOVQ    parts_len+8(FP), R12
	MOVQ    text+24(FP), SI
	MOVQ    last+32(FP), R13
	MOVQ    most+40(FP), CX
	VMOVDQU tens<>(SB), X11
	VMOVDQU hundreds<>(SB), X12
	VMOVDQU myriads<>(SB), X13
	VMOVUPD eights<>(SB), X14
	ADDQ    SI, R13
	XORQ    DX, DX              // rows read
	MOVQ    SI, DI              // start of the row

row:
	CMPQ DX, CX
	JGE  done
	CMPQ SI, R13
	JHI  done
	MOVQ BX, R8
	MOVQ R12, R9

part: // R11 is 1 behind a minus, R10 1 where there is a sign or what stands for one
	MOVBLZX (SI), AX
	XORL    R11, R11
	CMPB    AX, $0x2d
	SETEQ   R11
	XORL    R10, R10
	CMPB    AX, rowPart_padding(R8)
	SETEQ   R10
	ORQ     R11, R10
	ANDQ    rowPart_signed(R8), R10
	ADDQ    R10, SI

	// What is not what it must be is above its limit.
	VMOVDQU  (SI), Y0
	VPXOR    rowPart_fixed(R8), Y0, Y0
	VPSUBUSB rowPart_limit(R8), Y0, Y1
	VPTEST   Y1, Y1
	JNZ      done

	// Sixteen digits become eight pairs, four fours, two eights.
	VPSHUFB    rowPart_pick(R8), X0, X0
	VPMADDUBSW X11, X0, X0
	VPMADDWD   X12, X0, X0
	VPACKUSDW  X0, X0, X0
	VPMADDWD   X13, X0, X0
	VCVTDQ2PD  X0, X0
	VMULPD     X14, X0, X0
	VUNPCKHPD  X0, X0, X1
	VADDSD     X1, X0, X0
	VMULSD     rowPart_times(R8), X0, X0
	VDIVSD     rowPart_over(R8), X0, X0
	SHLQ       $63, R11
	VMOVQ      R11, X1
	VPOR       X1, X0, X0
	MOVQ       rowPart_to(R8), R10
	VMOVSD     X0, (R10)(DX*8)

	ADDQ rowPart_length(R8), SI
	ADDQ $rowPart__size, R8
	DECQ R9
	JNZ  part

	INCQ DX
	MOVQ SI, DI
	JMP  row

done:
	VZEROUPPER
	SUBQ text+24(FP), DI
	MOVQ DI, size+48(FP)
	MOVQ DX, n+56(FP)
	RET
