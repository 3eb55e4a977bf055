//go:build !linux

package heap

// largePages is a hint that only Linux takes.
func largePages([]byte) {}
