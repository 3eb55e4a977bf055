package main

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"
)

// A log that grows is judged as it grows: waited for while it has only begun,
// a line for each new verdict, an end with the report when all is good. A line
// the logger has only half written is not read.
func TestFollow(t *testing.T) {
	whole, err := os.ReadFile(filepath.Join(repository, "testdata", "demo", "bump.csv"))
	if err != nil {
		t.Fatal(err)
	}
	lines := bytes.SplitAfter(whole, []byte("\n"))
	path := filepath.Join(t.TempDir(), "grow.csv")
	var out bytes.Buffer
	said := &heard{}
	c := &console{out: &out, errOut: said}
	o := checkOptions{every: 2 * time.Millisecond}
	grow := func(rows int, torn string) {
		text := append(bytes.Join(lines[:rows], nil), torn...)
		if err := os.WriteFile(path, text, 0o666); err != nil {
			t.Error(err)
		}
	}
	grow(3, "")
	done := make(chan error)
	go func() { done <- o.follow(t.Context(), c, path) }()
	for _, step := range []struct {
		rows int
		says string
	}{{100, "waiting: "}, {215, "lags doubtful"}, {len(lines) - 1, ""}} {
		grow(step.rows, "2026-03-11T09:14:00+01:00,4.0,1")
		if step.says != "" {
			said.waitFor(t, step.says)
		}
	}
	select {
	case err := <-done:
		if err != nil {
			t.Fatal(err)
		}
	case <-time.After(20 * time.Second):
		t.Fatalf("a good log is still followed; said\n%s", said)
	}
	if !strings.Contains(out.String(), "gain        good") || !strings.Contains(out.String(), "grow.csv") {
		t.Errorf("the report is\n%s", out.String())
	}
	if last := said.String(); !strings.Contains(last, "gain good, lags good, dead time good") || strings.Count(last, "\n") > 6 {
		t.Errorf("said\n%s", last)
	}
}

// Ctrl-C ends the watch with what is known.
func TestFollowStops(t *testing.T) {
	whole, err := os.ReadFile(filepath.Join(repository, "testdata", "demo", "bump.csv"))
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "short.csv")
	if err := os.WriteFile(path, bytes.Join(bytes.SplitAfter(whole, []byte("\n"))[:215], nil), 0o666); err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(t.Context())
	var out bytes.Buffer
	said := &heard{}
	o := checkOptions{every: time.Millisecond}
	done := make(chan error)
	go func() { done <- o.follow(ctx, &console{out: &out, errOut: said}, path) }()
	said.waitFor(t, "doubtful")
	stop()
	if err := <-done; err != nil || !strings.Contains(out.String(), "doubtful") {
		t.Errorf("%v, report\n%s", err, out.String())
	}
}

// heard is a writer that another goroutine may listen to.
type heard struct {
	mu   sync.Mutex
	text bytes.Buffer
}

func (h *heard) Write(b []byte) (int, error) {
	h.mu.Lock()
	defer h.mu.Unlock()
	return h.text.Write(b)
}

func (h *heard) String() string {
	h.mu.Lock()
	defer h.mu.Unlock()
	return h.text.String()
}

func (h *heard) waitFor(t *testing.T, words string) {
	t.Helper()
	for end := time.Now().Add(20 * time.Second); !strings.Contains(h.String(), words); time.Sleep(time.Millisecond) {
		if time.Now().After(end) {
			t.Fatalf("%q was not said, but\n%s", words, h)
		}
	}
}
