// Command lagwright turns the log of a heater's bump test into a model with
// bounds, gains that hold for every plausible plant, and a replay of past runs.
//
// There is no computation here: one file per command reads the command line,
// calls the library packages (data, fit, tune, validate) and prints what they
// return.
package main

import (
	"context"
	"os"
	"os/signal"
	"syscall"

	_ "lagwright/cmd/lagwright/internal/pages" // memory in large pages
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// A second Ctrl-C ends the process at once, should the first not be enough.
	context.AfterFunc(ctx, stop)
	signal.Ignore(syscall.SIGPIPE) // a write then returns an error, see pipe
	os.Exit(Main(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr))
}
