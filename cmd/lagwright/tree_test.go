package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"
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
