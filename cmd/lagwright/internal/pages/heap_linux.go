package pages

import (
	"syscall"
	"unsafe"
)

const (
	// large is the size of the larger pages of the usual processors, bytes.
	large = 2 << 20
	// step is as much memory as Go asks the system for at a time, and begins with.
	step = 2 * large
	// collapse is MADV_COLLAPSE, which systems older than Linux 6.1 refuse.
	collapse = 25
)

// room is half of the memory that is reserved, which with what a stack needs besides
// makes 64 MiB.
type room [31 << 20]byte

// begun lies in the memory that the process begins with.
var begun = new([64]byte)

// The next addresses of the heap are had, and left free, by a goroutine that widens its
// stack and ends. There is no other way: a stack is memory of the heap, of which only what
// is used is touched, and goes back to it when its goroutine ends, where a piece of
// the heap would have to wait for a collection. That collection, and what the heap
// is touched for before it can be made, cost a tenth of a fit of a thousand rows.
func init() {
	if !wanted() || scarce() {
		return
	}
	done := make(chan struct{})
	go func() {
		defer close(done)
		stretch[room](nil)
		var here byte // on the stack as it is now
		join(uintptr(unsafe.Pointer(begun)), uintptr(unsafe.Pointer(&here)))
	}()
	<-done
}

// join asks for large pages from one address of the heap to another and a little beyond,
// and makes such of the first ones, in which some memory is in use by now. Addresses
// without memory are passed over.
func join(from, to uintptr) {
	from &^= large - 1
	end := (to + step - 1) &^ (step - 1)
	if end <= from || end-from > uintptr(4*len(room{})) {
		return // the system gave the memory elsewhere
	}
	advise(from, end-from, syscall.MADV_HUGEPAGE)
	advise(from, large, collapse)
	advise(from+large, large, collapse)
}

// advise tells the system how a range of memory will be used.
func advise(from, size uintptr, how int) {
	_, _, _ = syscall.Syscall(syscall.SYS_MADVISE, from, size, uintptr(how))
}

// scarce reports whether the addresses that the process may use are limited: room that
// is never used would then cost others their place.
func scarce() bool {
	var limit syscall.Rlimit
	err := syscall.Getrlimit(syscall.RLIMIT_AS, &limit)
	return err != nil || uint64(limit.Cur) < 1<<40
}

// wanted reports whether the system gives large pages to those who ask.
func wanted() bool {
	var text [64]byte
	n := readFile("/sys/kernel/mm/transparent_hugepage/enabled", text[:])
	const never = "[never]"
	for i := 0; i+len(never) <= n; i++ {
		if string(text[i:i+len(never)]) == never {
			return false
		}
	}
	return n > 0
}

// readFile reads the beginning of a small file; zero bytes if there is none.
func readFile(name string, into []byte) int {
	f, err := syscall.Open(name, syscall.O_RDONLY|syscall.O_CLOEXEC, 0)
	if err != nil {
		return 0
	}
	defer func() { _ = syscall.Close(f) }()
	n, err := syscall.Read(f, into)
	if err != nil {
		return 0
	}
	return n
}
