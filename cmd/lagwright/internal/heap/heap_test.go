package heap

import (
	"runtime"
	"runtime/debug"
	"testing"
	"time"
)

// The first collection is put off, and the ones after it come as usual.
func TestWiden(t *testing.T) {
	defer debug.SetGCPercent(debug.SetGCPercent(usualPercent))
	percent := func() int {
		p := debug.SetGCPercent(usualPercent)
		debug.SetGCPercent(p)
		return p
	}
	widen()
	if got := percent(); got != 4*usualPercent {
		t.Errorf("before the first collection the heap grows by %d %%, want %d", got, 4*usualPercent)
	}
	for range 100 {
		runtime.GC()
		time.Sleep(time.Millisecond)
		if percent() == usualPercent {
			break
		}
	}
	if got := percent(); got != usualPercent {
		t.Errorf("after a collection the heap grows by %d %%, want %d", got, usualPercent)
	}
	debug.SetGCPercent(50)
	widen()
	if got := percent(); got != 50 {
		t.Errorf("a growth of 50 %% became %d %%", got)
	}
}
