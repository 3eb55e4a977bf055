package main

import (
	"encoding/json"
	"fmt"
	"io"
	"runtime"
	"runtime/debug"

	"github.com/spf13/cobra"
)

// build is what is known of how this program was built.
type build struct {
	Version  string `json:"version"`
	Revision string `json:"revision"` // "" where built outside version control
	Time     string `json:"time"`     // of the revision, RFC 3339
	Modified bool   `json:"modified"` // with changes that are not in the revision
	Go       string `json:"go"`
	Platform string `json:"platform"`
}

func newVersion(c *console) *cobra.Command {
	return &cobra.Command{
		Use:     "version",
		Short:   "Version and build information",
		Example: "  lagwright version --json",
		Args:    needArgs(0, 0, "lagwright version"),
		RunE: func(*cobra.Command, []string) error {
			return c.deliver(buildInfo())
		},
	}
}

// version is the module's version, "(devel)" for a build from a work tree.
func version() string { return buildInfo().Version }

// tool is how files name the program that made them.
func tool() string { return "lagwright " + version() }

func buildInfo() *build {
	b := &build{Version: "(devel)", Go: runtime.Version(), Platform: runtime.GOOS + "/" + runtime.GOARCH}
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return b
	}
	if info.Main.Version != "" {
		b.Version = info.Main.Version
	}
	for _, s := range info.Settings {
		switch s.Key {
		case "vcs.revision":
			b.Revision = s.Value
		case "vcs.time":
			b.Time = s.Value
		case "vcs.modified":
			b.Modified = s.Value == "true"
		}
	}
	return b
}

func (b *build) WriteJSON(w io.Writer) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	return e.Encode(b)
}

func (b *build) WriteText(w io.Writer) error {
	fmt.Fprintf(w, "lagwright %s\n", b.Version)
	if b.Revision != "" {
		state := ""
		if b.Modified {
			state = ", modified"
		}
		fmt.Fprintf(w, "revision  %s (%s%s)\n", b.Revision, b.Time, state)
	}
	_, err := fmt.Fprintf(w, "built     with %s for %s\n", b.Go, b.Platform)
	return err
}
