package main

import (
	"bytes"
	"io"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"sync"

	"lagwright/data"
)

// refuseOverwriting stops an output from taking the place of an input, or of
// anything else that its name says is a log, and from failing after the work.
func (c *console) refuseOverwriting(inputs []string, outputs ...string) error {
	if err := refuseInputs(inputs, outputs...); err != nil {
		return err
	}
	for _, output := range outputs {
		if err := refuseLog(output); err != nil {
			return err
		}
	}
	return refuseUnwritable(outputs...)
}

// refuseInputs stops an output from taking the place of an input: a file, or
// one of those that a folder or a pattern stands for.
func refuseInputs(inputs []string, outputs ...string) error {
	var there []os.FileInfo // outputs that would replace a file
	for _, output := range outputs {
		if out, err := os.Stat(output); err == nil && out.Mode().IsRegular() {
			there = append(there, out)
		}
	}
	if len(there) == 0 {
		return nil
	}
	for _, path := range inputs {
		files, err := data.Expand([]string{path})
		if err != nil { // said by who reads it
			continue
		}
		for _, file := range files {
			in, err := os.Stat(file)
			if err == nil && slices.ContainsFunc(there, func(out os.FileInfo) bool { return os.SameFile(in, out) }) {
				return usageErrorf("%s is both input and output; write to another name", file)
			}
		}
	}
	return nil
}

// refuseLog stops a result from taking the place of a file that is called as
// logs are. A result of lagwright under such a name may be written again.
func refuseLog(output string) error {
	info, err := os.Stat(output)
	if err != nil || !info.Mode().IsRegular() || !data.IsLogName(output) {
		return nil
	}
	if kind, _, _ := lagwrightFile(output); kind != "" {
		return nil
	}
	return usageErrorf("%s exists and is a log by its name, which the result would replace; write to another name, such as %s",
		output, bareName(output)+".json")
}

// footerSize is how much of the end of a Parquet file surely holds the names
// of the columns of a table of runs.
const footerSize = 1 << 20

// holdsRuns tells a table of runs that validate wrote from a log in Parquet,
// by columns that no log has.
func holdsRuns(path string) bool {
	f, err := os.Open(path)
	if err != nil {
		return false
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil || !info.Mode().IsRegular() {
		return false
	}
	end, err := io.ReadAll(io.NewSectionReader(f, max(0, info.Size()-footerSize), footerSize))
	return err == nil && bytes.Contains(end, []byte("sha256")) && bytes.Contains(end, []byte("probability"))
}

// bareName takes the endings off the name of a log, that of its packing too.
func bareName(log string) string {
	for _, ending := range []string{".gz", ".zst"} {
		log = strings.TrimSuffix(log, ending)
	}
	return strings.TrimSuffix(log, filepath.Ext(log))
}

// jobFile are the names of what a whole job writes into its folder.
var jobFile = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`^(card\.json|gains\.json|replay\.json|report\.html|(log|residuals|intervals|poles|step-response|load-response|sensitivity|replay-\d+)\.svg)$`)
})

// jobMarks are files that together only a whole job leaves in a folder.
var jobMarks = []string{"card.json", "gains.json", "replay.json", "report.html", "log.svg", "residuals.svg", "intervals.svg"}

// refuseSpreading stops a job from mixing its files with those of a folder
// that is not its own. In one that a job wrote, what a user added stays, and
// that is said. more are names that the job writes besides the usual ones.
func (c *console) refuseSpreading(folder string, more ...string) error {
	entries, err := os.ReadDir(folder)
	if err != nil {
		return nil // not there yet, or said by who writes it
	}
	var names, others []string
	for _, e := range entries {
		name := e.Name()
		if strings.HasPrefix(name, ".") {
			continue
		}
		names = append(names, name)
		if !jobFile().MatchString(name) && !slices.Contains(more, name) {
			others = append(others, name)
		}
	}
	if len(names) == 0 {
		return nil
	}
	for _, mark := range append(slices.Clone(jobMarks), more...) {
		if !slices.Contains(names, mark) {
			return usageErrorf("%s is a folder with other files in it (%s), among which the results would be spread; name a new folder with -o, such as -o %s",
				folder, first(names), shellQuote(filepath.Join(folder, "results")))
		}
	}
	if len(others) > 0 {
		c.note("%s: the results in it are written again; what else is there stays: %s", folder, first(others))
	}
	return nil
}

// first lists the first few names.
func first(names []string) string {
	if len(names) > 3 {
		return strings.Join(names[:3], ", ") + ", …"
	}
	return strings.Join(names, ", ")
}
