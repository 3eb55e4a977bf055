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
	Narrow()
	if got := percent(); got != narrow {
		t.Errorf("with long columns the heap grows by %d %% at once, want %d", got, narrow)
	}
	if got := collected(narrow); got != narrow {
		t.Errorf("with long columns the heap grows by %d %%, want %d", got, narrow)
	}
}

// What the user asks for stays.
func TestOthersStay(t *testing.T) {
	for _, asked := range []int{70, first} {
		before := debug.SetGCPercent(asked)
		later.Store(0)
		widen()
		Narrow()
		if got := percent(); got != asked {
			t.Errorf("a growth of %d %% became %d %%", asked, got)
		}
		debug.SetGCPercent(before)
	}
}
