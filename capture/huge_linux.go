package capture

import (
	"syscall"
	"unsafe"
)

// hugePages asks the system to back a long new slice with large pages: writing
// to it for the first time then costs a hundredth of the page faults. It is a
// hint, and may be refused without harm.
func hugePages(v []float64) {
	const page = 2 << 20
	if len(v)*8 < 2*page {
		return
	}
	b := unsafe.Slice((*byte)(unsafe.Pointer(&v[0])), len(v)*8)
	from := -int(uintptr(unsafe.Pointer(&b[0]))) & (page - 1)
	_ = syscall.Madvise(b[from:len(b)-(len(b)-from)%page], syscall.MADV_HUGEPAGE)
}
