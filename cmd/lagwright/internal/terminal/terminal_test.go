package terminal

import (
	"bytes"
	"os"
	"testing"
)

func TestNotATerminal(t *testing.T) {
	if _, ok := Width(&bytes.Buffer{}); ok {
		t.Error("a buffer is taken for a terminal")
	}
	f, err := os.CreateTemp(t.TempDir(), "")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if _, ok := Width(f); ok {
		t.Error("a file is taken for a terminal")
	}
	if Colour(f) {
		t.Error("colour for a file")
	}
}
