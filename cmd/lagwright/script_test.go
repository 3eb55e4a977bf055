package main

import (
	"bytes"
	"errors"
	"flag"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/rogpeppe/go-internal/testscript"
)

var update = flag.Bool("update", false, "rewrite the expected files inside testdata/script")

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"lagwright": main})
}

// TestScript runs the manual in testdata/script: every command as a person
// types it. $DEMO is the folder of the demo logs.
func TestScript(t *testing.T) {
	demo, err := filepath.Abs(filepath.Join(repository, "testdata", "demo"))
	if err != nil {
		t.Fatal(err)
	}
	shared := sharedFolder(t)
	testscript.Run(t, testscript.Params{
		Dir:                 "testdata/script",
		RequireExplicitExec: true,
		RequireUniqueNames:  true,
		UpdateScripts:       *update,
		Setup: func(e *testscript.Env) error {
			e.Setenv("DEMO", demo)
			e.Setenv("SHARED", shared)
			e.Setenv("SOURCE_DATE_EPOCH", "1773220320")
			return nil
		},
		Condition: func(condition string) (bool, error) {
			if condition != "shared" {
				return false, fmt.Errorf("unknown condition %q", condition)
			}
			return shared != "", nil
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"exitcode": scriptExitCode,
			"oneline":  scriptOneLine,
			"lastline": scriptLastLine,
			"hostile":  scriptHostile,
			"narrow":   scriptNarrow,
			"words":    scriptWords,
			"plain":    scriptPlain,
			"bytes":    scriptBytes,
			"truncate": scriptTruncate,
		},
	})
}

// sharedFolder holds published recordings that are read and never committed:
// where LAGWRIGHT_SHARED says, else in the folder shared beside the
// repository; "" where there is none.
func sharedFolder(t *testing.T) string {
	folder := os.Getenv("LAGWRIGHT_SHARED")
	wanted := folder != ""
	if !wanted {
		folder = filepath.Join(repository, "..", "shared")
	}
	folder, err := filepath.Abs(folder)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(folder, "data")); err != nil {
		if wanted {
			t.Fatalf("LAGWRIGHT_SHARED: %v", err)
		}
		return ""
	}
	return folder
}

// exitcode 3 lagwright fit x.csv: the command must end with this very code,
// or with one of several: exitcode 0,4 lagwright run x.csv.
func scriptExitCode(ts *testscript.TestScript, neg bool, args []string) {
	if len(args) < 2 || neg {
		ts.Fatalf("usage: exitcode CODE COMMAND...")
	}
	err := ts.Exec(args[1], args[2:]...)
	got := 0
	if exit := (*exec.ExitError)(nil); errors.As(err, &exit) {
		got = exit.ExitCode()
	} else if err != nil {
		ts.Fatalf("%v", err)
	}
	if !slices.Contains(strings.Split(args[0], ","), strconv.Itoa(got)) {
		ts.Fatalf("exit code %d, want %s", got, args[0])
	}
}

// oneline FILE: the file (or stderr) holds one line, which begins with the
// program's name.
func scriptOneLine(ts *testscript.TestScript, neg bool, args []string) {
	text := ts.ReadFile(args[0])
	if strings.Count(text, "\n") != 1 || !strings.HasPrefix(text, "lagwright: ") || !strings.HasSuffix(text, "\n") {
		ts.Fatalf("want one line that begins with \"lagwright: \", have %q", text)
	}
}

// lastline: the last line on standard error is the program's one line; those
// before it say what was written.
func scriptLastLine(ts *testscript.TestScript, neg bool, args []string) {
	lines := strings.Split(strings.TrimRight(ts.ReadFile("stderr"), "\n"), "\n")
	for i, line := range lines {
		prefix := "wrote "
		if i == len(lines)-1 {
			prefix = "lagwright: "
		}
		if !strings.HasPrefix(line, prefix) {
			ts.Fatalf("want a line that begins with %q, have %q", prefix, line)
		}
	}
}

// hostile FILE (Go-quoted): writes a bump test whose columns try to be obeyed.
func scriptHostile(ts *testscript.TestScript, neg bool, args []string) {
	var b strings.Builder
	b.WriteString("time_s,\"=cmd|' /C calc'!A0 heater \x1b[31m [V]\",\"temp <script>alert(1)</script><img src=x onerror=alert(2)> \u202e [degC]\"\n")
	for t := range 200 {
		u, y := 4.0, 60.0
		if t >= 40 {
			u, y = 5, 60+10*-math.Expm1(-float64(t-40)/15)
		}
		// Three of a kind of unevenness stand in for noise.
		fmt.Fprintf(&b, "%d,%g,%.2f\n", t, u, y+0.05*math.Sin(float64(7*t))+0.03*math.Cos(float64(13*t*t)))
	}
	name, err := strconv.Unquote(`"` + args[0] + `"`)
	ts.Check(err)
	path := ts.MkAbs(name)
	ts.Check(os.MkdirAll(filepath.Dir(path), 0o755))
	ts.Check(os.WriteFile(path, []byte(b.String()), 0o644))
}

// narrow FILE: no line is wider than 80 columns.
func scriptNarrow(ts *testscript.TestScript, neg bool, args []string) {
	for line := range strings.Lines(ts.ReadFile(args[0])) {
		if n := utf8.RuneCountInString(strings.TrimRight(line, "\n")); n > 80 {
			ts.Fatalf("%d columns: %s", n, line)
		}
	}
}

var anyNumber = regexp.MustCompile(`(± )?-?[0-9][0-9.]*(e-?[0-9]+)?`)

// words FILE EXPECTED: the same words in the same order; numbers, which a
// better fit or synthesis may change, whether an interval is even (±), and
// line breaks, which follow them, may differ.
func scriptWords(ts *testscript.TestScript, neg bool, args []string) {
	words := func(file string) string {
		text := anyNumber.ReplaceAllStringFunc(strings.Join(strings.Fields(ts.ReadFile(file)), " "), func(number string) string {
			if strings.HasPrefix(number, "±") {
				return ""
			}
			return "#"
		})
		return strings.Join(strings.Fields(text), " ")
	}
	if got, want := words(args[0]), words(args[1]); got != want {
		ts.Fatalf("have %s\nwant %s", got, want)
	}
}

var unsafeText = regexp.MustCompile(`[\x00-\x08\x0b-\x1f\x7f\x{80}-\x{9f}\x{200e}\x{200f}\x{202a}-\x{202e}\x{2066}-\x{2069}]`)

// plain FILE: nothing in it moves a cursor, colours, or turns the writing.
func scriptPlain(ts *testscript.TestScript, neg bool, args []string) {
	if at := unsafeText.FindString(ts.ReadFile(args[0])); at != "" {
		ts.Fatalf("%s holds %q", args[0], at)
	}
}

// bytes FILE TEXT: writes the Go-quoted text, for files that a script cannot
// hold as they are. bytes FILE TEXT COUNT repeats it.
func scriptBytes(ts *testscript.TestScript, neg bool, args []string) {
	text, err := strconv.Unquote(`"` + args[1] + `"`)
	ts.Check(err)
	count := 1
	if len(args) > 2 {
		count, err = strconv.Atoi(args[2])
		ts.Check(err)
	}
	ts.Check(os.WriteFile(ts.MkAbs(args[0]), bytes.Repeat([]byte(text), count), 0o644))
}

// truncate FILE SOURCE COUNT: writes the first bytes of a file.
func scriptTruncate(ts *testscript.TestScript, neg bool, args []string) {
	whole, err := os.ReadFile(args[1])
	ts.Check(err)
	count, err := strconv.Atoi(args[2])
	ts.Check(err)
	ts.Check(os.WriteFile(ts.MkAbs(args[0]), whole[:count], 0o644))
}
