// Package heap fits Go's memory to a command that lives for a tenth of a second.
//
// Such a command spends a quarter of its time on memory that it touches for the
// first time, page by page, and on collections that free next to nothing.
package heap

import (
	"runtime"
	"runtime/debug"
	"sync"

	"lagwright/cmd/lagwright/internal/pages"
)

// room is how much memory a short command fills, bytes.
const room = 14 << 20

// usualPercent is Go's own growth of the heap from one collection to the next.
const usualPercent = 100

// Widen has the first megabytes of the heap in large pages, and puts the first
// collection off until they are full; from then on the heap grows as usual. Where
// GOGC is set, only the pages are large. It is worth its price to commands that
// compute, and is paid once.
var Widen = sync.OnceFunc(widen)

func widen() {
	before := debug.SetGCPercent(-1) // memory of this size would begin a collection of its own
	pages.Under(make([]byte, room))
	runtime.GC() // what was only asked for to have the addresses can be used
	if before != usualPercent {
		debug.SetGCPercent(before)
		return
	}
	debug.SetGCPercent(4 * usualPercent)
	runtime.AddCleanup(new([64]byte), func(percent int) { debug.SetGCPercent(percent) }, before)
}
