package pages

import (
	"reflect"
	"testing"
)

func TestCode(t *testing.T) {
	from, to := code()
	for _, f := range []any{TestCode, code, reflect.ValueOf} {
		if at := reflect.ValueOf(f).Pointer(); at < from || at >= to {
			t.Errorf("a function at %#x lies outside %#x to %#x", at, from, to)
		}
	}
}

func TestHexadecimal(t *testing.T) {
	for _, c := range []struct {
		text string
		want uintptr
		rest string
	}{
		{"00400000-00eb2000 r-xp", 0x400000, "-00eb2000 r-xp"},
		{"7fff12ab", 0x7fff12ab, ""},
		{"", 0, ""},
		{"[heap]", 0, "[heap]"},
	} {
		v, rest := hexadecimal([]byte(c.text))
		if v != c.want || string(rest) != c.rest {
			t.Errorf("%q: %#x and %q, want %#x and %q", c.text, v, rest, c.want, c.rest)
		}
	}
}
