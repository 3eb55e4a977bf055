package atomicfile

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

func read(t *testing.T, path string) string {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

func names(t *testing.T, dir string) []string {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, e := range entries {
		out = append(out, e.Name())
	}
	return out
}

func text(s string, err error) func(io.Writer) error {
	return func(w io.Writer) error {
		io.WriteString(w, s)
		return err
	}
}

func TestWrite(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "card.json")
	if err := Write(path, text("one", nil)); err != nil {
		t.Fatal(err)
	}
	if err := Write(path, text("half", errors.New("disk full"))); err == nil {
		t.Error("a failed write gave no error")
	}
	if got := read(t, path); got != "one" {
		t.Errorf("after a failed write the file holds %q, want the old content", got)
	}
	if err := Write(path, text("two", nil)); err != nil {
		t.Fatal(err)
	}
	if got := read(t, path); got != "two" {
		t.Errorf("file holds %q, want the new content", got)
	}
	if got := names(t, dir); len(got) != 1 {
		t.Errorf("files left: %q, want only card.json", got)
	}
}

func TestWriteFailedLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	if err := Write(filepath.Join(dir, "x"), text("half", errors.New("no"))); err == nil {
		t.Error("no error")
	}
	if got := names(t, dir); len(got) != 0 {
		t.Errorf("files left: %q", got)
	}
	if err := Write(filepath.Join(dir, "absent", "x"), text("", nil)); err == nil {
		t.Error("no error for a folder that does not exist")
	}
	if err := Write(dir, text("", nil)); err == nil {
		t.Error("no error for a folder in the place of the file")
	}
}

func TestWriteKeepsLink(t *testing.T) {
	dir := t.TempDir()
	real, link := filepath.Join(dir, "real"), filepath.Join(dir, "link")
	if err := os.WriteFile(real, []byte("old"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink("real", link); err != nil {
		t.Skip(err)
	}
	if err := Write(link, text("new", nil)); err != nil {
		t.Fatal(err)
	}
	if got := read(t, real); got != "new" {
		t.Errorf("the link's target holds %q, want new", got)
	}
}

func TestFolder(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "bump")
	put := func(name, content string, err error) func(string) error {
		return func(d string) error {
			if werr := os.WriteFile(filepath.Join(d, name), []byte(content), 0o644); werr != nil {
				return werr
			}
			return err
		}
	}
	if err := Folder(path, put("a", "1", errors.New("no"))); err == nil {
		t.Error("no error")
	}
	if got := names(t, dir); len(got) != 0 {
		t.Errorf("left after a failure: %q", got)
	}
	for _, step := range []struct{ name, content string }{{"a", "1"}, {"b", "2"}, {"a", "3"}} {
		if err := Folder(path, put(step.name, step.content, nil)); err != nil {
			t.Fatal(err)
		}
	}
	if a, b := read(t, filepath.Join(path, "a")), read(t, filepath.Join(path, "b")); a != "3" || b != "2" {
		t.Errorf("a = %q, b = %q, want 3 and 2", a, b)
	}
	if got := names(t, dir); len(got) != 1 {
		t.Errorf("left: %q, want only the folder", got)
	}
}

// TestCheck: what could not be written is found out beforehand, told with the
// folder and never with the temporary file, and nothing stays behind.
func TestCheck(t *testing.T) {
	dir := t.TempDir()
	file := filepath.Join(dir, "file")
	if err := os.WriteFile(file, []byte("old"), 0o666); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name, path, want string
		noFolder         bool
	}{
		{"new", filepath.Join(dir, "new.json"), "", false},
		{"old", file, "", false},
		{"device", os.DevNull, "", false},
		{"no folder", filepath.Join(dir, "nodir", "x.json"), "the folder " + filepath.Join(dir, "nodir") + " does not exist: make it first", true},
		{"below a file", filepath.Join(file, "x.json"), file + " is a file, not a folder: write to another", true},
		{"a folder", dir, "is a folder", false},
	} {
		err := Check(c.path)
		if c.want == "" && err != nil || c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want) || strings.Contains(err.Error(), ".tmp")) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
		if errors.As(err, new(*NoFolder)) != c.noFolder {
			t.Errorf("%s: %T", c.name, err)
		}
		if c.name == "old" || c.name == "new" || c.name == "a folder" {
			continue
		}
		if late := Write(c.path, text("late", nil)); (late == nil) != (err == nil) || late != nil && late.Error() != err.Error() {
			t.Errorf("%s: writing says %v, checking %v", c.name, late, err)
		}
	}
	for path, want := range map[string]string{filepath.Join(dir, "job"): "", dir: "", file: "is not a folder", filepath.Join(dir, "nodir", "job"): "does not exist: make it first"} {
		if err := CheckFolder(path); (want == "") != (err == nil) || err != nil && !strings.Contains(err.Error(), want) {
			t.Errorf("CheckFolder(%s): %v, want %q", path, err, want)
		}
	}
	if got := names(t, dir); len(got) != 1 || read(t, file) != "old" {
		t.Errorf("left behind: %q", got)
	}
	if err := folderError(filepath.Join(dir, "x"), &os.PathError{Op: "open", Path: ".x.tmp", Err: syscall.EACCES}); !strings.Contains(err.Error(), "the folder "+dir+" may not be written into") {
		t.Error(err)
	}
	if err := folderError(filepath.Join(dir, "x"), &os.PathError{Op: "open", Path: ".x.tmp", Err: syscall.ENOSPC}); strings.Contains(err.Error(), ".tmp") || !errors.Is(err, syscall.ENOSPC) {
		t.Error(err)
	}
}
