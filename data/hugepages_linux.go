package data

import (
	"syscall"
	"unsafe"
)

// hugePage is the size of the larger pages of the usual processors, bytes.
const hugePage = 2 << 20

// roomFor is an empty column with room for n rows. That of a long one begins on a large
// page and asks for such pages to its end: it is filled from end to end, every small
// page costs the first write to it a fault, and in a virtual machine these faults
// take longer than reading the numbers. It is a hint; what the kernel makes of it
// changes no value.
func roomFor[T int8 | int64 | float64](n int) []T {
	size := int(unsafe.Sizeof(*new(T)))
	if n*size < 2*hugePage {
		return make([]T, 0, n)
	}
	whole := (n*size + hugePage - 1) &^ (hugePage - 1)
	v := make([]T, (whole+hugePage)/size)
	first := -int(uintptr(unsafe.Pointer(unsafe.SliceData(v)))) & (hugePage - 1)
	bytes := unsafe.Slice((*byte)(unsafe.Pointer(unsafe.SliceData(v))), len(v)*size)
	_ = syscall.Madvise(bytes[first:first+whole], syscall.MADV_HUGEPAGE)
	first /= size
	return v[first : first : first+n]
}
