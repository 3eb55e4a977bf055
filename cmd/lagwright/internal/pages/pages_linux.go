package pages

import "syscall"

// collapse is MADV_COLLAPSE, which systems older than Linux 6.1 refuse.
const collapse = 25

// largePages asks for large pages under b.
func largePages(b []byte) { _ = syscall.Madvise(b, syscall.MADV_HUGEPAGE) }

// joinPages makes large pages of those in use between two addresses. Addresses without
// memory are refused one by one.
func joinPages(from, to uintptr) {
	for ; from < to; from += Large {
		_, _, _ = syscall.Syscall(syscall.SYS_MADVISE, from, Large, collapse)
	}
}
