package main

import (
	"slices"
	"testing"
)

func TestWrapLine(t *testing.T) {
	for _, tt := range []struct {
		name, line string
		want       []string
	}{
		{"short", "caution: hot", []string{"caution: hot"}},
		{"empty", "", []string{""}},
		{"prose", "stay with it and be ready to switch off", []string{"stay with it and", "  be ready to switch", "  off"}},
		{"indented prose", "  gain: no change seen in it", []string{"  gain: no change", "    seen in it"}},
		{"table", "run          date        gain K/V", []string{"run          date        gain K/V"}},
		{"long word", "a/very/long/path/that/cannot/break ok", []string{"a/very/long/path/that/cannot/break", "  ok"}},
		{"wide letters count once", "°°°° °°°° °°°° °°°°", []string{"°°°° °°°° °°°° °°°°"}},
	} {
		if got := wrapLine(tt.line, 20); !slices.Equal(got, tt.want) {
			t.Errorf("%s: %q, want %q", tt.name, got, tt.want)
		}
	}
}
