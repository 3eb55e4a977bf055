package main

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

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
			err := atomicfile.Folder(args[0], func(dir string) error { return manPages(cmd.Root(), dir) })
			if err == nil {
				c.note("wrote man pages to %s", args[0])
			}
			return unwritable(err)
		},
	}
}

// manPages writes the pages of a command and of all below it. (cobra's own
// generator brings readers of Markdown and YAML whose start-up every command
// would pay for, a tenth of it.)
func manPages(cmd *cobra.Command, dir string) error {
	for _, sub := range cmd.Commands() {
		if !sub.IsAvailableCommand() || sub.IsAdditionalHelpTopicCommand() {
			continue
		}
		if err := manPages(sub, dir); err != nil {
			return err
		}
	}
	f, err := os.Create(filepath.Join(dir, manName(cmd)+".1"))
	if err != nil {
		return err
	}
	w := bufio.NewWriter(f)
	manPage(w, cmd)
	if err := w.Flush(); err != nil {
		f.Close()
		return err
	}
	return f.Close()
}

func manName(cmd *cobra.Command) string { return strings.ReplaceAll(cmd.CommandPath(), " ", "-") }

// manPage writes one page in the macros of man(7).
func manPage(w io.Writer, cmd *cobra.Command) {
	cmd.InitDefaultHelpFlag()
	name := manName(cmd)
	fmt.Fprintf(w, ".TH %q 1 %q %q Lagwright\n", strings.ToUpper(name), manDate().Format("2006-01-02"), tool())
	fmt.Fprintf(w, ".SH NAME\n%s \\- %s\n", roff(name), roff(cmd.Short))
	fmt.Fprintf(w, ".SH SYNOPSIS\n.B %s\n", roff(cmd.UseLine()))
	fmt.Fprint(w, ".SH DESCRIPTION\n")
	manText(w, cmd.Long)
	manFlags(w, "OPTIONS", cmd.NonInheritedFlags())
	manFlags(w, "OPTIONS OF EVERY COMMAND", cmd.InheritedFlags())
	if cmd.Example != "" {
		fmt.Fprint(w, ".SH EXAMPLES\n")
		manText(w, cmd.Example)
	}
	manSeeAlso(w, cmd)
}

// manText writes paragraphs; lines that are indented keep their breaks.
func manText(w io.Writer, text string) {
	kept := false
	for _, line := range strings.Split(strings.Trim(text, "\n"), "\n") {
		if indented := strings.HasPrefix(line, " "); indented != kept && line != "" {
			kept = indented
			fmt.Fprintln(w, map[bool]string{true: ".nf", false: ".fi"}[kept])
		}
		if line == "" {
			fmt.Fprintln(w, ".PP")
			continue
		}
		fmt.Fprintln(w, roff(line))
	}
	if kept {
		fmt.Fprintln(w, ".fi")
	}
}

func manFlags(w io.Writer, title string, flags *pflag.FlagSet) {
	if !flags.HasAvailableFlags() {
		return
	}
	fmt.Fprintf(w, ".SH %s\n", title)
	flags.VisitAll(func(f *pflag.Flag) {
		if f.Hidden {
			return
		}
		value, usage := pflag.UnquoteUsage(f)
		fmt.Fprint(w, ".TP\n.B ")
		if f.Shorthand != "" {
			fmt.Fprintf(w, "%s, ", roff("-"+f.Shorthand))
		}
		fmt.Fprintln(w, roff(strings.TrimSpace("--"+f.Name+" "+value)))
		fmt.Fprintln(w, roff(usage))
	})
}

func manSeeAlso(w io.Writer, cmd *cobra.Command) {
	var others []string
	if cmd.HasParent() {
		others = append(others, manName(cmd.Parent()))
	}
	for _, sub := range cmd.Commands() {
		if sub.IsAvailableCommand() && !sub.IsAdditionalHelpTopicCommand() {
			others = append(others, manName(sub))
		}
	}
	if len(others) == 0 {
		return
	}
	fmt.Fprint(w, ".SH SEE ALSO\n")
	for i, o := range others {
		end := ","
		if i == len(others)-1 {
			end = ""
		}
		fmt.Fprintf(w, ".BR %s (1)%s\n", roff(o), end)
	}
}

// roff keeps a line of text from being read as a macro or an escape.
func roff(line string) string {
	line = strings.NewReplacer(`\`, `\e`, "-", `\-`).Replace(line)
	if strings.HasPrefix(line, ".") || strings.HasPrefix(line, "'") {
		return `\&` + line
	}
	return line
}

// manDate keeps today's date out of the pages.
func manDate() time.Time {
	if s, err := strconv.ParseInt(os.Getenv("SOURCE_DATE_EPOCH"), 10, 64); err == nil {
		return time.Unix(s, 0).UTC()
	}
	return time.Unix(0, 0).UTC()
}
