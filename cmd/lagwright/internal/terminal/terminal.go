// Package terminal knows what the far end of a stream can show: whether it is
// a terminal, how wide, and whether colour is wanted.
package terminal

import (
	"io"
	"os"
)

// Width gives the columns of the terminal behind w, and false where w is not
// a terminal.
func Width(w io.Writer) (int, bool) {
	f, ok := w.(*os.File)
	if !ok {
		return 0, false
	}
	return width(f)
}

// Colour tells whether w may be sent colours: a terminal, and NO_COLOR unset
// or empty (no-color.org).
func Colour(w io.Writer) bool {
	_, ok := Width(w)
	return ok && os.Getenv("NO_COLOR") == "" && os.Getenv("TERM") != "dumb"
}
