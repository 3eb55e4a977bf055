package data

import (
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
)

// logEndings are the file name endings that a folder is searched for. A file
// named on the command line is read whatever its name.
var logEndings = []string{".csv", ".tsv", ".txt", ".log", ".dat", ".parquet", ".pq"}

// Expand turns files, folders and glob patterns into a list of files: the
// arguments in the order given, the files of each folder (searched to its
// bottom) or pattern sorted by name. "-" stands for standard input and stays.
// A folder without logs and a pattern that matches nothing are errors.
func Expand(args []string) ([]string, error) {
	var out []string
	for _, arg := range args {
		if arg == "-" {
			out = append(out, arg)
			continue
		}
		files, err := expandOne(arg)
		if err != nil {
			return nil, err
		}
		out = append(out, files...)
	}
	return out, nil
}

func expandOne(arg string) ([]string, error) {
	info, err := os.Stat(arg)
	switch {
	case err == nil && info.IsDir():
		return logsIn(arg)
	case err == nil:
		return []string{arg}, nil
	case !strings.ContainsAny(arg, "*?["):
		return nil, fmt.Errorf("%s: %w", arg, pathCause(err))
	}
	matches, err := filepath.Glob(arg)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", arg, err)
	}
	var out []string
	for _, m := range matches {
		if info, err := os.Stat(m); err == nil && info.IsDir() {
			continue
		}
		out = append(out, m)
	}
	if len(out) == 0 {
		return nil, fmt.Errorf("%s: no file matches this pattern", arg)
	}
	slices.Sort(out)
	return out, nil
}

// logsIn lists the logs below a folder. Names that begin with a dot are left out.
func logsIn(dir string) ([]string, error) {
	var out []string
	err := filepath.WalkDir(dir, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		hidden := strings.HasPrefix(d.Name(), ".") && path != dir
		switch {
		case hidden && d.IsDir():
			return filepath.SkipDir
		case !hidden && !d.IsDir() && IsLogName(d.Name()):
			out = append(out, path)
		}
		return nil
	})
	if err != nil {
		return nil, fmt.Errorf("%s: %w", dir, pathCause(err))
	}
	if len(out) == 0 {
		return nil, fmt.Errorf("%s: no log in this folder (looked for names ending in %s, also with .gz or .zst)",
			dir, strings.Join(logEndings, ", "))
	}
	slices.Sort(out)
	return out, nil
}

// IsLogName tells a name that ends as logs do, packed or not. What a user
// calls a log may be the only record of a run and is not to be written over.
func IsLogName(name string) bool {
	name = strings.ToLower(name)
	name = strings.TrimSuffix(strings.TrimSuffix(name, ".gz"), ".zst")
	return slices.Contains(logEndings, filepath.Ext(name))
}

// pathCause takes the path out of a file error, for messages that begin with it.
func pathCause(err error) error {
	if pe, ok := err.(*fs.PathError); ok {
		return pe.Err
	}
	return err
}
