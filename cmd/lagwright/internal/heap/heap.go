// Package heap fits Go's collections of memory to a command that lives for a tenth of a
// second: those of its first megabytes free next to nothing.
package heap

import (
	"runtime"
	"runtime/debug"
	"sync"
)

// usualPercent is Go's own growth of the heap from one collection to the next.
const usualPercent = 100

// Widen puts the first collection off until the heap has four times the usual size;
// from then on it grows as usual. Where GOGC is set, nothing changes. It is paid once.
var Widen = sync.OnceFunc(widen)

func widen() {
	before := debug.SetGCPercent(4 * usualPercent)
	if before != usualPercent {
		debug.SetGCPercent(before)
		return
	}
	runtime.AddCleanup(new([64]byte), func(percent int) { debug.SetGCPercent(percent) }, before)
}
