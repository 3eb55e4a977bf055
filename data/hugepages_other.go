//go:build !linux

package data

// roomFor is an empty column with room for n rows; large pages are asked for on Linux
// alone.
func roomFor[T int8 | int64 | float64](n int) []T { return make([]T, 0, n) }
