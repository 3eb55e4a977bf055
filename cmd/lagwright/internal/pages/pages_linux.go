package pages

import "syscall"

// collapse is MADV_COLLAPSE, which systems older than Linux 6.1 refuse.
const collapse = 25

// largePages asks for large pages under b.
func largePages(b []byte) { _ = syscall.Madvise(b, syscall.MADV_HUGEPAGE) }

// joinPages makes large pages of those in use between two addresses, unless the machine's
// owner wants none. Addresses without memory are refused one by one.
func joinPages(from, to uintptr) {
	if !wanted() {
		return
	}
	for ; from < to; from += large {
		_, _, _ = syscall.Syscall(syscall.SYS_MADVISE, from, large, collapse)
	}
}

// wanted reports whether the system gives large pages to those who ask.
func wanted() bool {
	f, err := syscall.Open("/sys/kernel/mm/transparent_hugepage/enabled", syscall.O_RDONLY|syscall.O_CLOEXEC, 0)
	if err != nil {
		return false
	}
	defer func() { _ = syscall.Close(f) }()
	var text [64]byte
	n, err := syscall.Read(f, text[:])
	const never = "[never]"
	for i := 0; i+len(never) <= n; i++ {
		if string(text[i:i+len(never)]) == never {
			return false
		}
	}
	return err == nil && n > 0
}
