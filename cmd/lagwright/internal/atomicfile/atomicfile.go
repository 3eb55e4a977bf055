// Package atomicfile writes files that appear whole or not at all: the bytes
// go to a temporary file in the same folder, which is renamed when complete.
package atomicfile

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"syscall"
)

// Write calls write with the file's content to be and puts the result in
// place of path. After an error the old file, if any, is untouched. A path
// that is a device or pipe is written directly; a symbolic link stays one.
func Write(path string, write func(io.Writer) error) error {
	path, special, err := target(path)
	if err != nil {
		return err
	}
	if special {
		return writeDirectly(path, write)
	}
	tmp, err := create(path)
	if err != nil {
		return err
	}
	if err := fill(tmp, write); err != nil {
		os.Remove(tmp.Name())
		return fmt.Errorf("%s: %w", path, err)
	}
	if err := os.Rename(tmp.Name(), path); err != nil {
		os.Remove(tmp.Name())
		return err
	}
	return nil
}

// Check finds out, before any work, whether [Write] could put a file at path:
// it makes the temporary file and takes it away again.
func Check(path string) error {
	path, special, err := target(path)
	if err != nil || special {
		return err
	}
	tmp, err := create(path)
	if err != nil {
		return err
	}
	return errors.Join(tmp.Close(), os.Remove(tmp.Name()))
}

// CheckFolder is [Check] for [Folder].
func CheckFolder(path string) error {
	tmp, err := besideFolder(path)
	if err != nil {
		return err
	}
	return os.Remove(tmp)
}

// NoFolder is the error of a path in a folder that is not there, or that is no
// folder.
type NoFolder struct {
	Folder string
	IsFile bool
}

func (e *NoFolder) Error() string {
	if e.IsFile {
		return fmt.Sprintf("%s is a file, not a folder: write to another folder", e.Folder)
	}
	return fmt.Sprintf("the folder %s does not exist: make it first, or write to another", e.Folder)
}

// folderError names the folder that path was to be made in, and not the
// temporary file, of which nobody knows.
func folderError(path string, err error) error {
	if err == nil {
		return nil
	}
	folder := filepath.Dir(filepath.Clean(path))
	info, statErr := os.Stat(folder)
	switch {
	case errors.Is(statErr, fs.ErrNotExist):
		return &NoFolder{Folder: folder}
	case statErr == nil && !info.IsDir(), errors.Is(statErr, syscall.ENOTDIR):
		return &NoFolder{Folder: folder, IsFile: true}
	case errors.Is(err, fs.ErrPermission):
		return fmt.Errorf("the folder %s may not be written into (%w): write to another", folder, fs.ErrPermission)
	}
	why := err
	if path := (*fs.PathError)(nil); errors.As(err, &path) {
		why = path.Err
	}
	return fmt.Errorf("write %s: %w", path, why)
}

// target follows symbolic links and tells whether what is there cannot be
// replaced by a rename without harm.
func target(path string) (real string, special bool, err error) {
	info, err := os.Stat(path)
	if errors.Is(err, fs.ErrNotExist) {
		return path, false, nil
	}
	if err != nil {
		return "", false, folderError(path, err)
	}
	if info.IsDir() {
		return "", false, fmt.Errorf("%s is a folder", path)
	}
	if !info.Mode().IsRegular() {
		return path, true, nil
	}
	real, err = filepath.EvalSymlinks(path)
	return real, false, err
}

// create opens a new file beside path with the permissions that a plain
// os.Create would give (os.CreateTemp keeps others from reading it).
func create(path string) (*os.File, error) {
	dir, base := filepath.Split(path)
	for {
		name := fmt.Sprintf("%s.%s.%08x.tmp", dir, base, rand.Uint32())
		f, err := os.OpenFile(name, os.O_CREATE|os.O_EXCL|os.O_WRONLY, 0o666)
		if !errors.Is(err, fs.ErrExist) {
			return f, folderError(path, err)
		}
	}
}

// fill writes, flushes to disk and closes f.
func fill(f *os.File, write func(io.Writer) error) error {
	w := bufio.NewWriter(f)
	err := write(w)
	if err == nil {
		err = w.Flush()
	}
	if err == nil {
		err = f.Sync()
	}
	return errors.Join(err, f.Close())
}

func writeDirectly(path string, write func(io.Writer) error) error {
	f, err := os.OpenFile(path, os.O_WRONLY, 0)
	if err != nil {
		return err
	}
	w := bufio.NewWriter(f)
	err = write(w)
	if err == nil {
		err = w.Flush()
	}
	return errors.Join(err, f.Close())
}

// Folder calls fill with an empty temporary folder and puts the result at
// path. Where path exists already, files of the same name are replaced one by
// one and others are left alone.
func Folder(path string, fill func(dir string) error) error {
	path = filepath.Clean(path)
	tmp, err := besideFolder(path)
	if err != nil {
		return err
	}
	defer os.RemoveAll(tmp)
	if err := os.Chmod(tmp, 0o755); err != nil {
		return err
	}
	if err := fill(tmp); err != nil {
		return err
	}
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		return os.Rename(tmp, path)
	}
	return moveInto(tmp, path)
}

// besideFolder makes an empty folder beside path, which must be no file.
func besideFolder(path string) (string, error) {
	path = filepath.Clean(path)
	if info, err := os.Stat(path); err == nil && !info.IsDir() {
		return "", fmt.Errorf("%s exists and is not a folder", path)
	}
	tmp, err := os.MkdirTemp(filepath.Dir(path), "."+filepath.Base(path)+".*.tmp")
	return tmp, folderError(path, err)
}

func moveInto(from, to string) error {
	entries, err := os.ReadDir(from)
	if err != nil {
		return err
	}
	for _, e := range entries {
		if err := os.Rename(filepath.Join(from, e.Name()), filepath.Join(to, e.Name())); err != nil {
			return err
		}
	}
	return nil
}
