package atomicfile

import (
	"errors"
	"io"
	"os"
	"path/filepath"
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
