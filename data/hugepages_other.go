//go:build !linux

package data

// inHugePages is a hint that only Linux takes.
func inHugePages[T int8 | int64 | float64]([]T) {}
