package main

import (
	"bufio"
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// readFile reads a file that lagwright wrote; "-" is standard input.
func readFile[T any](c *console, path string, read func(r io.Reader, name string) (T, error)) (T, error) {
	var none T
	if path == "-" {
		v, err := read(c.in, "standard input")
		if err != nil {
			return none, inputError{err}
		}
		return v, nil
	}
	f, err := os.Open(path)
	if err != nil {
		return none, inputError{err}
	}
	defer f.Close()
	v, err := read(f, filepath.Base(path))
	if err != nil {
		return none, inputError{err}
	}
	return v, nil
}

func (c *console) readCard(path string) (*fit.Card, error) {
	card, err := readFile(c, path, fit.ReadCard)
	if err != nil {
		return nil, cardError(path, err)
	}
	if err := c.agreeOnInput(filepath.Base(path), card.Units.Input); err != nil {
		return nil, err
	}
	return card, nil
}

// readGains reads gains for a heater with an input in the unit given; "V" where
// it is not known.
func (c *console) readGains(path, input string) (*tune.Gains, error) {
	gains, err := readFile(c, path, tune.ReadGains)
	if err != nil {
		return nil, gainsError(path, input, err)
	}
	return gains, nil
}

// gainsError says what to do with a file that is no gains.
func gainsError(path, input string, err error) error {
	name := filepath.Base(path)
	switch kind, _, _ := lagwrightFile(path); {
	case kind == "card":
		return inputErrorf("%s is a model card, not gains; make gains with lagwright tune %s -o gains.json", name, shellQuote(name))
	case kind != "" && kind != "gains":
		return inputErrorf("%s is a file of %s, not gains: give the gains that lagwright tune wrote", name, kind)
	case kind == "" && table(path):
		return inputErrorf("%s is not a file of gains: give the gains that lagwright tune wrote, or write them out: kc=0.4%s/K,ti=12s", name, input)
	}
	return err
}

func (c *console) readReplay(path string) (*validate.Replay, error) {
	return readFile(c, path, validate.ReadReplay)
}

// maxFile bounds what is read of a file of ours: a card of 100 000 plants has
// some 20 MB.
const maxFile = 1 << 28

// lagwrightFile tells what kind of file of ours a path holds ("card", "gains",
// …) and gives its text; kind is "" for anything else.
func lagwrightFile(path string) (kind string, text []byte, err error) {
	f, err := os.Open(path)
	if errors.Is(err, fs.ErrNotExist) || path == "-" {
		return "", nil, nil // a pattern, standard input, or an error of who reads it
	}
	if err != nil {
		return "", nil, inputError{err}
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil || !info.Mode().IsRegular() || info.Size() > maxFile {
		return "", nil, nil
	}
	b := bufio.NewReader(f)
	start, _ := b.Peek(64)
	if !bytes.HasPrefix(bytes.TrimLeft(start, " \t\r\n"), []byte("{")) {
		return "", nil, nil
	}
	if text, err = io.ReadAll(b); err != nil {
		return "", nil, inputError{err}
	}
	var head struct {
		Schema string `json:"schema"`
	}
	if json.Unmarshal(text, &head) != nil {
		return "", nil, nil
	}
	parts := strings.Split(head.Schema, "/")
	if len(parts) != 3 || parts[0] != "lagwright" {
		return "", nil, nil
	}
	return parts[1], text, nil
}
