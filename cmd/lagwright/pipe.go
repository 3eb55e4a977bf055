package main

import (
	"errors"
	"io"
	"syscall"
)

// A pipe is an output whose reader may leave early, as "| head" does. That is
// no fault: the rest is thrown away and the work goes on to its end, so that
// files are written and journals removed.
type pipe struct {
	to   io.Writer
	left bool // the reader
}

func (p *pipe) Write(b []byte) (int, error) {
	if p.left {
		return len(b), nil
	}
	n, err := p.to.Write(b)
	if errors.Is(err, syscall.EPIPE) {
		p.left = true
		return len(b), nil
	}
	return n, err
}
