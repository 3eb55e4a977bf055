package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// Every command can say what it is for: one line, a real example, and how it
// exits where it computes.
func TestEveryCommandHasHelp(t *testing.T) {
	root := newRoot(&console{})
	names := map[string]bool{}
	for _, cmd := range root.Commands() {
		names[cmd.Name()] = true
		if cmd.Short == "" || !strings.Contains(cmd.Example, "lagwright "+cmd.Name()) {
			t.Errorf("%s: help without a summary or an example", cmd.Name())
		}
		if cmd.RunE == nil {
			t.Errorf("%s does nothing", cmd.Name())
		}
		if cmd.Args == nil {
			t.Errorf("%s takes any arguments", cmd.Name())
		}
	}
	if !names["version"] || !names["completion"] {
		t.Errorf("commands: %v", names)
	}
}

func TestExitCode(t *testing.T) {
	plain := errors.New("x")
	for _, tt := range []struct {
		err  error
		want int
	}{
		{nil, 0},
		{plain, 1},
		{usageError{plain}, 2},
		{inputError{plain}, 3},
		{answerNo{plain}, 4},
		{fmt.Errorf("card: %w", inputError{plain}), 3},
		{inputError{fmt.Errorf("read: %w", context.Canceled)}, 1},
	} {
		if got := exitCode(tt.err); got != tt.want {
			t.Errorf("exitCode(%v) = %d, want %d", tt.err, got, tt.want)
		}
	}
}

// A wrong command line is exit 2 and one line, whatever cobra makes of it.
func TestWrongCommandLines(t *testing.T) {
	for _, tt := range []struct {
		line, want string
	}{
		{"ft", `unknown command "ft"`},
		{"verzion", `did you mean "version"?`},
		{"help nope", `unknown command "nope"`},
		{"--nope", "unknown flag: --nope"},
		{"version --nope", "see lagwright version --help"},
		{"version x", "takes no arguments"},
		{"completion", "lagwright completion bash"},
		{"completion tcsh", `invalid argument "tcsh"`},
		{"version --rand x", "want a whole number"},
		{"version --workers 0", "want a whole number from 1 on"},
	} {
		var out, errOut bytes.Buffer
		code := Main(t.Context(), strings.Fields(tt.line), strings.NewReader(""), &out, &errOut)
		if code != exitUsage {
			t.Errorf("%s: exit %d, want 2", tt.line, code)
		}
		if out.Len() > 0 {
			t.Errorf("%s: standard output %q", tt.line, out.String())
		}
		if msg := errOut.String(); strings.Count(msg, "\n") != 1 || !strings.Contains(msg, tt.want) {
			t.Errorf("%s: message %q, want one line that says %q", tt.line, msg, tt.want)
		}
	}
}

// An interrupt ends the work with exit 1 and leaves nothing behind.
func TestInterrupt(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	dir := t.TempDir()
	bump := filepath.Join(repository, "testdata", "demo", "bump.csv")
	for _, args := range [][]string{
		{"fit", bump, "-o", filepath.Join(dir, "card.json")},
		{"check", bump, "-o", filepath.Join(dir, "check.json")},
		{"track", bump, bump, "-o", filepath.Join(dir, "drift.json")},
		{"run", bump, "-o", filepath.Join(dir, "folder")},
		{"demo", "-o", filepath.Join(dir, "demo")},
	} {
		var out, errOut bytes.Buffer
		code := Main(ctx, args, strings.NewReader(""), &out, &errOut)
		if want := "lagwright: interrupted; no result was written\n"; code != exitMachine || errOut.String() != want {
			t.Errorf("%s: exit %d, message %q", args[0], code, errOut.String())
		}
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	if len(entries) > 0 {
		t.Errorf("left behind: %v", entries)
	}
}

// A validation with an output says how to go on.
func TestInterruptedValidation(t *testing.T) {
	dir := t.TempDir()
	demo := filepath.Join(repository, "testdata", "demo")
	card, replay := filepath.Join(dir, "card.json"), filepath.Join(dir, "replay.json")
	gains, log := filepath.Join(demo, "gains-in-force.json"), filepath.Join(demo, "setpoint-change.csv")
	var out, errOut bytes.Buffer
	if code := Main(t.Context(), []string{"fit", filepath.Join(demo, "bump.csv"), "--structure", "fopdt", "--plants", "20", "-q", "-o", card}, nil, &out, &errOut); code != exitDone {
		t.Fatalf("fit: %s", errOut.String())
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	code := Main(ctx, []string{"validate", card, log, "--gains", gains, "-o", replay}, nil, &out, &errOut)
	if !strings.Contains(errOut.String(), "--resume goes on") || code != exitMachine {
		t.Errorf("exit %d, message %q", code, errOut.String())
	}
	if _, err := os.Stat(replay); err == nil {
		t.Error("an interrupted validation wrote its output")
	}
}

func TestCommandLine(t *testing.T) {
	got := commandLine([]string{"run", "my log.csv", "--ms", "1.6", "it's", ""})
	if want := `lagwright run 'my log.csv' --ms 1.6 'it'\''s' ''`; got != want {
		t.Errorf("command line %s, want %s", got, want)
	}
}

func TestFolderFor(t *testing.T) {
	for log, want := range map[string]string{
		"bump.csv":           "bump",
		"logs/bump.csv.gz":   "bump",
		"a.b.parquet":        "a.b",
		"export":             "export-lagwright",
		"-":                  "lagwright-run",
		".csv":               ".csv-lagwright",
		"dir.d/no-ending":    "no-ending-lagwright",
		"bump.csv.zst":       "bump",
		"C-2026-03-11.5.log": "C-2026-03-11.5",
	} {
		if got := folderFor(log); got != want {
			t.Errorf("folderFor(%q) = %q, want %q", log, got, want)
		}
	}
}

func TestBarLine(t *testing.T) {
	got := barLine("replaying", 120, 240, 12*time.Second)
	if want := "replaying [############............] 120 of 240, 12 s left"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}
