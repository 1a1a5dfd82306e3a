package sparse

import (
	"syscall"
	"unsafe"
)

// hugePage is the size of the larger pages of 64-bit processors [bytes].
const hugePage = 2 << 20

// preferHugePages asks for large pages under fresh memory, whose first touch otherwise costs as much as a third of a
// factorisation. It is a wish: without them the memory works as well.
func preferHugePages(m []float64) {
	if len(m)*8 < 2*hugePage {
		return
	}
	start := uintptr(unsafe.Pointer(&m[0]))
	from := (start + hugePage - 1) / hugePage * hugePage
	to := (start + uintptr(len(m))*8) / hugePage * hugePage
	whole := unsafe.Slice((*byte)(unsafe.Pointer(&m[0])), len(m)*8)
	_ = syscall.Madvise(whole[from-start:to-start], syscall.MADV_HUGEPAGE)
}
