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

DATA nines<>+0(SB)/8, $0x0909090909090909
DATA nines<>+8(SB)/8, $0x0909090909090909
GLOBL nines<>(SB), RODATA|NOPTR, $16

DATA blanks<>+0(SB)/8, $0x2020202020202020
DATA blanks<>+8(SB)/8, $0x2020202020202020
DATA blanks<>+16(SB)/8, $0x2020202020202020
DATA blanks<>+24(SB)/8, $0x2020202020202020
GLOBL blanks<>(SB), RODATA|NOPTR, $32

// func readFitting(parts []rowPart, shapes *numberShapes, text *byte, last, most int) (size, n int)
TEXT ·readFitting(SB), NOSPLIT, $0-72
	VMOVDQU blanks<>(SB), Y8
	VMOVDQU nines<>(SB), X9
	VMOVDQU zeros<>(SB), X10
	VMOVDQU tens<>(SB), X11
	VMOVDQU hundreds<>(SB), X12
	VMOVDQU myriads<>(SB), X13
	VMOVUPD eights<>(SB), X14
	MOVQ    shapes+24(FP), R13
	MOVQ    text+32(FP), SI
	MOVQ    SI, DI              // start of the row
	XORQ    DX, DX              // rows read

row:
	CMPQ DX, most+48(FP)
	JGE  done
	MOVQ SI, AX
	SUBQ text+32(FP), AX
	CMPQ AX, last+40(FP)
	JGT  done
	MOVQ parts_base+0(FP), R8
	MOVQ parts_len+8(FP), R9

part:
	CMPB rowPart_number(R8), $0
	JEQ  rest

	// Blanks.
	XORL R11, R11
	CMPB rowPart_blanks(R8), $0
	JEQ  sign
	VPCMPEQB  (SI), Y8, Y0
	VPMOVMSKB Y0, R11
	NOTL      R11
	TZCNTL    R11, R11
	JCS       done

sign: // R12 becomes 1 behind a minus
	MOVBLZX (SI)(R11*1), BX
	XORL    R12, R12
	XORL    CX, CX
	CMPL    BX, $0x2d
	SETEQ   R12
	CMPL    BX, $0x2b
	SETEQ   CX
	ADDQ    R11, SI
	ADDQ    R12, SI
	ADDQ    CX, SI

	// AX: bytes of the number. R10: bytes before its mark, or all without one.
	VMOVDQU   (SI), Y0
	VPCMPEQB  rowPart_stop(R8), Y0, Y1
	VPMOVMSKB Y1, AX
	TZCNTL    AX, AX
	JCS       done
	CMPL      AX, $const_shapeMost
	JHI       done
	VPCMPEQB  rowPart_mark(R8), Y0, Y2
	VPMOVMSKB Y2, R10
	BTSL      AX, R10
	TZCNTL    R10, R10

	// BX: its shape. CX: its decimal places.
	MOVL    AX, BX
	SHLL    $const_shapeBits, BX
	ADDL    R10, BX
	MOVBLZX numberShapes_places(R13)(BX*1), CX
	CMPL    CX, $const_noNumber
	JEQ     done

	// Sixteen digits become eight pairs, four fours, two eights, one number.
	VPXOR      X10, X0, X1
	SHLL       $4, BX
	VPSHUFB    numberShapes_pick(R13)(BX*1), X1, X1
	VPSUBUSB   X9, X1, X2
	VPTEST     X2, X2
	JNZ        done
	VPMADDUBSW X11, X1, X1
	VPMADDWD   X12, X1, X1
	VPACKUSDW  X1, X1, X1
	VPMADDWD   X13, X1, X1
	VCVTDQ2PD  X1, X1
	VMULPD     X14, X1, X1
	VUNPCKHPD  X1, X1, X2
	VADDSD     X2, X1, X1
	MOVQ       rowPart_powers(R8), R10
	VDIVSD     (R10)(CX*8), X1, X1
	SHLQ       $63, R12
	VMOVQ      R12, X2
	VPOR       X2, X1, X1
	MOVQ       rowPart_to(R8), R10
	VMOVSD     X1, (R10)(DX*8)
	MOVQ       rowPart_places(R8), R10
	MOVB       CX, (R10)(DX*1)

	// The next part is looked for behind as many bytes as last time, so that the
	// processor goes on before it knows the number of bytes.
	CMPQ AX, rowPart_width(R8)
	JNE  widens
	ADDQ rowPart_width(R8), SI

rest: // of the part; what is not what it must be is above its limit
	VMOVDQU  (SI), Y0
	VPXOR    rowPart_fixed(R8), Y0, Y0
	VPSUBUSB rowPart_limit(R8), Y0, Y0
	VPTEST   Y0, Y0
	JNZ      done
	ADDQ     rowPart_length(R8), SI
	ADDQ     $rowPart__size, R8
	DECQ     R9
	JNZ      part

	INCQ DX
	MOVQ SI, DI
	JMP  row

widens:
	MOVQ AX, rowPart_width(R8)
	ADDQ AX, SI
	JMP  rest

done:
	VZEROUPPER
	SUBQ text+32(FP), DI
	MOVQ DI, size+56(FP)
	MOVQ DX, n+64(FP)
	RET
