// Package heap fits Go's collections of memory to what a command does: one of a
// thousand rows lives for a tenth of a second, and its collections free next to nothing;
// one of a million rows keeps its columns, and lets go of as many again.
package heap

import (
	"runtime"
	"runtime/debug"
	"sync"
	"sync/atomic"
)

// The heap's growth from one collection to the next, per cent.
const (
	usual  = 100 // Go's own
	first  = 4 * usual
	narrow = usual / 2
)

// later is the growth from the first collection on; 0 before Widen has set one.
var later atomic.Int64

// Widen puts the first collection off until the heap has four times the usual size;
// from then on it grows as usual. Where GOGC is set, nothing changes. It is paid once.
var Widen = sync.OnceFunc(widen)

func widen() {
	if before := debug.SetGCPercent(first); before != usual {
		debug.SetGCPercent(before)
		return
	}
	later.Store(usual)
	runtime.AddCleanup(new([64]byte), func(struct{}) {
		for p := int64(0); p != later.Load(); { // once more, if it was narrowed meanwhile
			p = later.Load()
			debug.SetGCPercent(int(p))
		}
	}, struct{}{})
}

// Narrow has a widened heap grow by half from one collection to the next. Long columns
// hold no pointers, and so collections cost next to nothing beside work on every row of
// them, while garbage as large as they are would double the memory in use.
func Narrow() {
	if later.CompareAndSwap(usual, narrow) {
		debug.SetGCPercent(narrow)
	}
}
