//go:build !linux

package terminal

import (
	"os"
	"strconv"
)

// width takes a character device for a terminal of COLUMNS columns, 80 where
// that is not set.
func width(f *os.File) (int, bool) {
	info, err := f.Stat()
	if err != nil || info.Mode()&os.ModeCharDevice == 0 {
		return 0, false
	}
	if n, err := strconv.Atoi(os.Getenv("COLUMNS")); err == nil && n > 0 {
		return n, true
	}
	return 80, true
}
