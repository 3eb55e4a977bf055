package main

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"time"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
	"lagwright/fit"
)

// followEvery is how often a log that is followed is looked at.
const followEvery = 2 * time.Second

// follow reads a log again whenever it has grown, says in a line each time the
// verdict changes, and ends when it is good throughout or the user has seen
// enough; then it prints the whole report.
func (o *checkOptions) follow(ctx context.Context, c *console, path string) error {
	if path == "-" {
		return usageErrorf("--follow needs the name of the file that grows, not standard input")
	}
	if ext := strings.ToLower(filepath.Ext(path)); ext == ".parquet" || ext == ".pq" || ext == ".gz" || ext == ".zst" {
		return usageErrorf("%s: --follow reads a text log while it grows; a %s file is whole only at its end", path, ext)
	}
	if info, err := os.Stat(path); err != nil {
		return inputError{err}
	} else if info.IsDir() {
		return usageErrorf("%s is a folder: --follow watches one file", path)
	}
	f := follower{options: o, console: c, path: path}
	tick := time.NewTicker(o.every)
	defer tick.Stop()
	for {
		if err := f.look(ctx); err != nil {
			return err
		}
		if f.good() {
			break
		}
		select {
		case <-ctx.Done():
			if f.report == nil {
				return ctx.Err()
			}
			return f.deliver()
		case <-tick.C:
		}
	}
	return f.deliver()
}

// A follower remembers what it saw last.
type follower struct {
	options *checkOptions
	console *console
	path    string
	size    int64
	said    string
	report  *fit.CheckReport // nil until the log could be judged
}

// look reads the file when its size has changed. What is wrong with a log that
// has only begun is said and waited out.
func (f *follower) look(ctx context.Context) error {
	info, err := os.Stat(f.path)
	if err != nil {
		return inputError{err}
	}
	if info.Size() == f.size {
		return nil
	}
	if info.Size() < f.size {
		f.report = nil // begun anew
	}
	f.size = info.Size()
	report, err := f.check(ctx)
	switch {
	case ctx.Err() != nil:
		return nil // the loop ends
	case errors.Is(err, fit.ErrOption):
		return err
	case err != nil:
		why := strings.TrimPrefix(err.Error(), "-: ") // the name under which the text was read
		f.say(why, "waiting: "+why)
		return nil
	}
	f.report = report
	verdict, cure := verdictWords(report)
	f.say(verdict, fmt.Sprintf("%s, %s: %s%s", format.Count(report.Rows, "row", "rows"), format.Duration(report.Span), verdict, cure))
	return nil
}

// check reads the lines that are whole; a logger may be in the middle of one.
func (f *follower) check(ctx context.Context) (*fit.CheckReport, error) {
	text, err := os.ReadFile(f.path)
	if err != nil {
		return nil, err
	}
	text = text[:bytes.LastIndexByte(text, '\n')+1]
	o := f.options.log.options
	o.Stdin = bytes.NewReader(text)
	runs, err := data.Read(ctx, "-", o)
	if err != nil {
		return nil, err
	}
	if len(runs) != 1 {
		return nil, fmt.Errorf("%d runs in the file: --follow watches one", len(runs))
	}
	runs[0].Source.File = filepath.Base(f.path)
	sum := sha256.Sum256(text)
	runs[0].Source.SHA256 = hex.EncodeToString(sum[:])
	options, err := new(fitFlags).with(f.console, &f.options.log, nil)
	if err != nil {
		return nil, err
	}
	return fit.Check(ctx, runs[0], options)
}

// say prints a line unless the last one meant the same.
func (f *follower) say(meaning, line string) {
	if meaning == f.said {
		return
	}
	f.said = meaning
	f.console.note("%s", line)
}

func (f *follower) deliver() error {
	return f.console.deliver(&checks{Schema: checkSchema, Reports: []*fit.CheckReport{f.report}})
}

func (f *follower) good() bool {
	if f.report == nil {
		return false
	}
	for _, v := range f.report.Verdict {
		if v.Verdict != "good" {
			return false
		}
	}
	return true
}

// verdictWords are the verdicts, and of the first that is not good what would help.
func verdictWords(r *fit.CheckReport) (verdicts, cure string) {
	var words []string
	for _, v := range r.Verdict {
		words = append(words, strings.ReplaceAll(v.Parameter, "_", " ")+" "+v.Verdict)
		if cure == "" && v.Verdict != "good" && len(v.Cures) > 0 {
			cure = "; " + v.Cures[0]
		}
	}
	return strings.Join(words, ", "), cure
}
