package capture

import "bytes"

// The shape of a number is how many bytes its digits and its mark take, and where among
// them the mark is. It tells which byte is which digit, and how many decimal places
// there are.

const (
	shapeMost = 16 // bytes of a number without its sign
	shapeBits = 5  // a shape is bytes << shapeBits + bytes before the mark, or all bytes without one
	noNumber  = 0xFF
	noDigit   = 0x80
)

// A numberShapes holds what follows from each shape.
type numberShapes struct {
	// places is the number of decimal places; noNumber for a shape without digits, or with
	// more than stencilDigits.
	places [(shapeMost + 1) << shapeBits]uint8
	// pick tells for each digit of a number of sixteen which byte holds it, noDigit for none.
	pick [(shapeMost + 1) << shapeBits][shapeMost]uint8
}

var shapes = makeShapes()

func makeShapes() (s numberShapes) {
	for i := range s.places {
		s.places[i] = noNumber
	}
	for size := 1; size <= shapeMost; size++ {
		for mark := 0; mark <= size; mark++ {
			i := size<<shapeBits + mark
			at := shapeMost
			for k := range s.pick[i] {
				s.pick[i][k] = noDigit
			}
			for k := size - 1; k >= 0; k-- {
				if k != mark {
					at--
					s.pick[i][at] = uint8(k)
				}
			}
			if digits := shapeMost - at; digits > 0 && digits <= stencilDigits {
				s.places[i] = uint8(max(0, size-1-mark))
			}
		}
	}
	return s
}

// isShape reports a number that has a shape, behind its sign.
func isShape(number []byte, mark byte) bool {
	if number[0] == '-' || number[0] == '+' {
		number = number[1:]
	}
	before := bytes.IndexByte(number, mark)
	if before < 0 {
		before = len(number)
	}
	return len(number) <= shapeMost && shapes.places[len(number)<<shapeBits+before] != noNumber
}
