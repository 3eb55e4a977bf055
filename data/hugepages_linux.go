package data

import (
	"syscall"
	"unsafe"
)

// hugePage is the size of the larger pages of the usual processors, bytes.
const hugePage = 2 << 20

// inHugePages asks for large pages under a long column, whose memory is filled
// from end to end: every small page costs the first write to it a fault, and in
// a virtual machine these faults take longer than reading the numbers. It is a
// hint; what the kernel makes of it changes no value.
func inHugePages[T int8 | int64 | float64](v []T) {
	n := cap(v) * int(unsafe.Sizeof(*new(T)))
	if n < 2*hugePage {
		return
	}
	bytes := unsafe.Slice((*byte)(unsafe.Pointer(unsafe.SliceData(v))), n)
	first := -int(uintptr(unsafe.Pointer(unsafe.SliceData(v)))) & (hugePage - 1)
	whole := (n - first) &^ (hugePage - 1)
	_ = syscall.Madvise(bytes[first:first+whole], syscall.MADV_HUGEPAGE)
}
