package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"strings"

	"github.com/spf13/pflag"

	"lagwright/cmd/lagwright/internal/atomicfile"
	"lagwright/cmd/lagwright/internal/format"
)

// console is what every command shares: the streams, and the flags that
// stand everywhere.
type console struct {
	in          io.Reader
	out, errOut io.Writer
	args        []string       // the command line without the program's name
	flags       *pflag.FlagSet // those of the command that runs

	json    bool
	output  string
	quiet   bool
	rand    int64
	workers int
}

func (c *console) addFlags(fs *pflag.FlagSet) {
	fs.BoolVar(&c.json, "json", false, "print the result as JSON, and nothing else on standard output")
	fs.StringVarP(&c.output, "output", "o", "", "write the result to this `FILE`")
	fs.BoolVarP(&c.quiet, "quiet", "q", false, "no messages and no progress on standard error, errors only")
	c.rand = 1
	valueFlag(fs, &c.rand, "rand", "SEED", "1", "seed of every random draw; the same seed gives the same bytes", wholeNumber)
	valueFlag(fs, &c.workers, "workers", "COUNT", "all", "processor cores to use", count)
}

// A result is what a library package computed; it writes itself.
type result interface {
	WriteJSON(io.Writer) error
	WriteText(io.Writer) error
}

// deliver writes a result where the command line wants it: as JSON to the
// file of -o, and as JSON (--json, or -o -) or text on standard output.
func (c *console) deliver(r result) error {
	if c.toFile() {
		if err := c.writeFile(c.output, r.WriteJSON); err != nil {
			return err
		}
	}
	if c.json || c.output == "-" {
		return r.WriteJSON(c.out)
	}
	return c.text(r.WriteText)
}

func (c *console) toFile() bool { return c.output != "" && c.output != "-" }

// writeFile puts a whole file in place and says so.
func (c *console) writeFile(path string, write func(io.Writer) error) error {
	if err := atomicfile.Write(path, write); err != nil {
		return unwritable(err)
	}
	c.note("wrote %s", path)
	return nil
}

// text prints what write writes on standard output, made safe to show (it may
// hold names out of a file) and prose wrapped to 80 columns.
func (c *console) text(write func(io.Writer) error) error {
	var b bytes.Buffer
	if err := write(&b); err != nil {
		return err
	}
	for line := range strings.Lines(b.String()) {
		line = format.Text(strings.TrimRight(line, "\n"))
		if _, err := fmt.Fprintln(c.out, strings.Join(wrapLine(line, columns), "\n")); err != nil {
			return err
		}
	}
	return nil
}

// note prints a message on standard error, unless --quiet.
func (c *console) note(message string, a ...any) {
	if !c.quiet {
		fmt.Fprintln(c.errOut, safe(fmt.Sprintf(message, a...)))
	}
}

// complain prints the one line that an error gets.
func (c *console) complain(ctx context.Context, err error) {
	if errors.Is(err, context.Canceled) && ctx.Err() != nil {
		message := "interrupted; no result was written"
		if errors.As(err, new(resumable)) {
			message += "; the same command with --resume goes on"
		}
		err = errors.New(message)
	}
	fmt.Fprintln(c.errOut, "lagwright: "+oneLine(err.Error()))
}

// commandLine is what was typed, quoted for a shell.
func commandLine(args []string) string {
	line := "lagwright"
	for _, arg := range args {
		line += " " + shellQuote(arg)
	}
	return line
}

func shellQuote(s string) string {
	const harmless = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789-_./=:,%+@"
	if s != "" && strings.Trim(s, harmless) == "" {
		return s
	}
	return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'"
}

// safe makes every line of s safe to show.
func safe(s string) string {
	lines := strings.Split(s, "\n")
	for i, line := range lines {
		lines[i] = format.Text(line)
	}
	return strings.Join(lines, "\n")
}

// oneLine brings a message of several lines onto one.
func oneLine(s string) string {
	var parts []string
	for line := range strings.Lines(s) {
		if line = strings.TrimSpace(line); line != "" {
			parts = append(parts, format.Text(line))
		}
	}
	return strings.Join(parts, "; ")
}
