package main

import (
	"io"
	"os"
	"path/filepath"

	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// readFile reads a file that lagwright wrote; "-" is standard input.
func readFile[T any](c *console, path string, read func(r io.Reader, name string) (T, error)) (T, error) {
	var none T
	if path == "-" {
		v, err := read(c.in, "standard input")
		if err != nil {
			return none, inputError{err}
		}
		return v, nil
	}
	f, err := os.Open(path)
	if err != nil {
		return none, inputError{err}
	}
	defer f.Close()
	v, err := read(f, filepath.Base(path))
	if err != nil {
		return none, inputError{err}
	}
	return v, nil
}

func (c *console) readCard(path string) (*fit.Card, error) { return readFile(c, path, fit.ReadCard) }

func (c *console) readGains(path string) (*tune.Gains, error) {
	return readFile(c, path, tune.ReadGains)
}

func (c *console) readReplay(path string) (*validate.Replay, error) {
	return readFile(c, path, validate.ReadReplay)
}
