// Package pages has memory in large pages where the system offers them. A page that is
// touched for the first time costs a command that lives for a tenth of a second more
// than what it does there. All of it is a hint; no value depends on it.
//
// It imports next to nothing, so that it is among the first packages to be
// initialised: the memory of the others' tables is then in large pages already.
package pages

import "unsafe"

// large is the size of the larger pages of the usual processors, bytes.
const large = 2 << 20

// first is as much memory as Go asks the system for at a time, and begins with.
const first = 2 * large

// begun lies in the memory that the process begins with.
var begun = new([64]byte)

func init() {
	at := uintptr(unsafe.Pointer(begun)) &^ (first - 1)
	joinPages(at, at+first)
}

// Under asks for large pages under a piece of memory that has not been touched, as far
// as they lie within it, and joins the pages of what the process began with up to there.
func Under(b []byte) {
	at := uintptr(unsafe.Pointer(unsafe.SliceData(b)))
	whole := (at + large - 1) &^ (large - 1)
	if end := (at + uintptr(len(b))) &^ (large - 1); end > whole {
		largePages(b[whole-at : end-at])
	}
	from := uintptr(unsafe.Pointer(begun)) &^ (first - 1)
	if whole > from && whole-from <= 4*large {
		joinPages(from, whole)
	}
}
