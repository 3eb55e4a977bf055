package main

import (
	"fmt"
	"strings"
	"sync"
	"time"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/cmd/lagwright/internal/terminal"
)

// progressDelay keeps the bar from flashing up for work that is quickly done.
const progressDelay = time.Second

// bar is a progress bar on standard error.
type bar struct {
	c     *console
	what  string
	start time.Time

	mu    sync.Mutex
	shown bool
}

// progress gives a callback that draws a bar, and a function that clears it.
// The callback is nil where nobody would see a bar.
func (c *console) progress(what string) (update func(done, total int), clear func()) {
	if _, ok := terminal.Width(c.errOut); !ok || c.quiet {
		return nil, func() {}
	}
	b := &bar{c: c, what: what, start: time.Now()}
	return b.update, b.clear
}

func (b *bar) update(done, total int) {
	b.mu.Lock()
	defer b.mu.Unlock()
	elapsed := time.Since(b.start)
	if elapsed < progressDelay || total <= 0 {
		return
	}
	b.shown = true
	fmt.Fprintf(b.c.errOut, "\r%s\x1b[K", barLine(b.what, done, total, elapsed))
}

func (b *bar) clear() {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.shown {
		fmt.Fprint(b.c.errOut, "\r\x1b[K")
		b.shown = false
	}
}

// barLine is "replaying [######......] 120 of 240, 12 s left".
func barLine(what string, done, total int, elapsed time.Duration) string {
	const cells = 24
	done = min(max(done, 0), total)
	full := cells * done / total
	line := fmt.Sprintf("%s [%s%s] %d of %d", what, strings.Repeat("#", full), strings.Repeat(".", cells-full), done, total)
	if done > 0 && done < total {
		left := elapsed.Seconds() * float64(total-done) / float64(done)
		line += ", " + format.Duration(left) + " left"
	}
	return line
}
