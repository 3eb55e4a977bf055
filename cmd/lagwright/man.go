package main

import (
	"os"
	"strconv"
	"time"

	"github.com/spf13/cobra"
	"github.com/spf13/cobra/doc"

	"lagwright/cmd/lagwright/internal/atomicfile"
)

// newMan is for packagers, and therefore hidden.
func newMan(c *console) *cobra.Command {
	return &cobra.Command{
		Use:   "man FOLDER",
		Short: "Man pages, one for each command",
		Long: `Writes a man page for each command into a folder. The date on them is that of
SOURCE_DATE_EPOCH where it is set, so that the same program gives the same pages.`,
		Example: "  lagwright man /usr/local/share/man/man1",
		Hidden:  true,
		Args:    needArgs(1, 1, "lagwright man man1"),
		RunE: func(cmd *cobra.Command, args []string) error {
			root := cmd.Root()
			root.DisableAutoGenTag = true
			header := &doc.GenManHeader{Section: "1", Source: tool(), Manual: "Lagwright", Date: manDate()}
			err := atomicfile.Folder(args[0], func(dir string) error { return doc.GenManTree(root, header, dir) })
			if err == nil {
				c.note("wrote man pages to %s", args[0])
			}
			return err
		},
	}
}

// manDate keeps today's date out of the pages; cobra leaves a zero date to
// the present.
func manDate() *time.Time {
	date := time.Unix(0, 0).UTC()
	if s, err := strconv.ParseInt(os.Getenv("SOURCE_DATE_EPOCH"), 10, 64); err == nil {
		date = time.Unix(s, 0).UTC()
	}
	return &date
}
