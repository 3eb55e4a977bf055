package terminal

import (
	"os"
	"syscall"
	"unsafe"
)

// width asks the terminal driver: ioctl(TIOCGWINSZ) fails on everything that
// is not a terminal, /dev/null included.
func width(f *os.File) (int, bool) {
	var size struct{ rows, cols, x, y uint16 }
	_, _, errno := syscall.Syscall(syscall.SYS_IOCTL, f.Fd(), syscall.TIOCGWINSZ, uintptr(unsafe.Pointer(&size)))
	if errno != 0 {
		return 0, false
	}
	if size.cols == 0 {
		return 80, true
	}
	return int(size.cols), true
}
