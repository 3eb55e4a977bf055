package heap

import (
	"syscall"
	"unsafe"
)

// largePage is the size of the larger pages of the usual processors, bytes.
const largePage = 2 << 20

// largePages asks for large pages under a piece of memory, as far as they lie
// within it. It is a hint; what the kernel makes of it changes no value.
func largePages(b []byte) {
	first := -int(uintptr(unsafe.Pointer(unsafe.SliceData(b)))) & (largePage - 1)
	whole := (len(b) - first) &^ (largePage - 1)
	_ = syscall.Madvise(b[first:first+whole], syscall.MADV_HUGEPAGE)
}
