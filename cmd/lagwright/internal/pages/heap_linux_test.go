package pages

import (
	"runtime"
	"testing"
	"unsafe"
)

// The stretched stack must be the heap's again, and not in use by anything.
func TestRoomIsLeftToTheHeap(t *testing.T) {
	if !wanted() {
		t.Skip("this system gives no large pages")
	}
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	if m.StackInuse > 4<<20 {
		t.Errorf("stacks hold %d bytes", m.StackInuse)
	}
	if free := m.HeapIdle; free < uint64(len(room{})) {
		t.Errorf("the heap has %d bytes to spare, want at least %d", free, len(room{}))
	}
}

// What is written in memory stays as it is while large pages are made of it.
func TestJoinLeavesMemoryAlone(t *testing.T) {
	for _, size := range []int{1, large - 1, large, 3*large + 17} {
		b := make([]byte, size)
		for i := range b {
			b[i] = byte(i * 7)
		}
		at := uintptr(unsafe.Pointer(unsafe.SliceData(b)))
		join(at, at+uintptr(size))
		for i, v := range b {
			if v != byte(i*7) {
				t.Fatalf("%d bytes: byte %d is %d, was %d", size, i, v, byte(i*7))
			}
		}
	}
}
