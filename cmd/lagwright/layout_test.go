package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// repository is the root of the module, seen from this package's folder.
const repository = "../.."

// order is the way data flows: a package may import those before it.
var order = []string{"data", "ident", "fit", "tune", "validate", "cmd"}

// topLevel is all that may lie in the root of the repository.
var topLevel = []string{
	"cmd", "data", "ident", "fit", "tune", "validate", "testdata",
	"go.mod", "go.sum", "README.md", "DEVELOPERS.md", ".ci", ".git", ".gitignore",
}

func TestImportsFollowTheData(t *testing.T) {
	checked := 0
	for rank, folder := range order {
		err := filepath.WalkDir(filepath.Join(repository, folder), func(path string, d fs.DirEntry, err error) error {
			if err != nil || d.IsDir() || filepath.Ext(path) != ".go" {
				return err
			}
			file, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
			if err != nil {
				return err
			}
			checked++
			for _, spec := range file.Imports {
				name, err := strconv.Unquote(spec.Path.Value)
				if err != nil {
					return err
				}
				if !mayImport(rank, name) {
					t.Errorf("%s imports %s: imports go %s", path, name, strings.Join(order, " <- "))
				}
			}
			return nil
		})
		if err != nil {
			t.Error(err)
		}
	}
	if checked == 0 {
		t.Error("no Go file found")
	}
}

func mayImport(rank int, name string) bool {
	rest, own := strings.CutPrefix(name, "lagwright/")
	if !own {
		return true
	}
	folder, _, _ := strings.Cut(rest, "/")
	at := slices.Index(order, folder)
	return at >= 0 && at <= rank
}

func TestMayImport(t *testing.T) {
	for _, tt := range []struct {
		from, name string
		want       bool
	}{
		{"fit", "lagwright/ident", true},
		{"fit", "lagwright/fit", true}, // its own external test
		{"fit", "lagwright/tune", false},
		{"data", "lagwright/cmd/lagwright/internal/format", false},
		{"cmd", "lagwright/cmd/lagwright/internal/format", true},
		{"tune", "lagwright/elsewhere", false},
		{"tune", "math", true},
	} {
		if got := mayImport(slices.Index(order, tt.from), tt.name); got != tt.want {
			t.Errorf("may %s import %s: %v, want %v", tt.from, tt.name, got, tt.want)
		}
	}
}

func TestTopLevel(t *testing.T) {
	entries, err := os.ReadDir(repository)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if e.Name() == demoFolder { // what the README's first command leaves
			continue
		}
		if !slices.Contains(topLevel, e.Name()) {
			t.Errorf("%s does not belong in the root of the repository; see DEVELOPERS.md", e.Name())
		}
	}
}
