package heap

import (
	"runtime"
	"runtime/debug"
	"testing"
	"time"
)

func percent() int {
	p := debug.SetGCPercent(usual)
	debug.SetGCPercent(p)
	return p
}

// collected waits until a collection has set the growth of the heap to want.
func collected(want int) int {
	for range 100 {
		runtime.GC()
		time.Sleep(time.Millisecond)
		if percent() == want {
			break
		}
	}
	return percent()
}

// The first collection is put off, and the ones after it come as usual, or sooner
// where long columns are kept.
func TestWidenAndNarrow(t *testing.T) {
	defer debug.SetGCPercent(debug.SetGCPercent(usual))
	widen()
	if got := percent(); got != first {
		t.Errorf("before the first collection the heap grows by %d %%, want %d", got, first)
	}
	if got := collected(usual); got != usual {
		t.Errorf("after a collection the heap grows by %d %%, want %d", got, usual)
	}
	widen()
	Narrow()
	if got := collected(narrow); got != narrow {
		t.Errorf("with long columns the heap grows by %d %%, want %d", got, narrow)
	}
}

// What the user asks for stays.
func TestWidenLeavesOthers(t *testing.T) {
	defer debug.SetGCPercent(debug.SetGCPercent(70))
	widen()
	if got := percent(); got != 70 {
		t.Errorf("a growth of 70 %% became %d %%", got)
	}
}
