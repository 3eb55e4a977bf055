//go:build !linux

package pages

func largePages([]byte) {}

func joinPages(from, to uintptr) {}
