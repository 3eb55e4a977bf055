package pages

import "testing"

// What asks for large pages must leave what is written in memory alone.
func TestUnder(t *testing.T) {
	for _, size := range []int{1, large - 1, large, 3*large + 17} {
		b := make([]byte, size)
		for i := range b {
			b[i] = byte(i * 7)
		}
		Under(b)
		for i, v := range b {
			if v != byte(i*7) {
				t.Fatalf("%d bytes: byte %d is %d, was %d", size, i, v, byte(i*7))
			}
		}
	}
}
