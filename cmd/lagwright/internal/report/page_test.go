package report

import (
	"bytes"
	"flag"
	"fmt"
	"html"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"unicode"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

var update = flag.Bool("update", false, "rewrite the golden files")

func pageOf(t *testing.T, b Bundle) string {
	t.Helper()
	var page bytes.Buffer
	if err := Page(&page, b); err != nil {
		t.Fatal(err)
	}
	return page.String()
}

// outline is what a page says, without its figures, style and script: one
// line for each piece of text, so that a change of words or order shows.
func outline(page string) string {
	for _, drop := range []string{`(?s)<style>.*?</style>`, `(?s)<script>.*?</script>`, `(?s)<svg.*?</svg>`, `(?s)<meta[^>]*>`} {
		page = regexp.MustCompile(drop).ReplaceAllString(page, "")
	}
	page = regexp.MustCompile(`</(th|td)>\s*<(th|td)[^>]*>`).ReplaceAllString(page, " | ")
	page = regexp.MustCompile(`<(h[1-6])[^>]*>`).ReplaceAllString(page, "\n<$1> ")
	page = regexp.MustCompile(`<small[^>]*>`).ReplaceAllString(page, " / ")
	page = regexp.MustCompile(`<[^h][^>]*>|</h[^>]*>|<h(ead|tml)[^>]*>`).ReplaceAllString(page, "")
	var lines []string
	for _, l := range strings.Split(html.UnescapeString(page), "\n") {
		if l = strings.TrimSpace(l); l != "" {
			lines = append(lines, l)
		}
	}
	return strings.Join(lines, "\n") + "\n"
}

func TestPageOutline(t *testing.T) {
	got := outline(pageOf(t, sampleBundle()))
	golden := filepath.Join("testdata", "outline.txt")
	if *update {
		if err := os.WriteFile(golden, []byte(got), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(golden)
	if err != nil {
		t.Fatal(err)
	}
	if got != string(want) {
		t.Errorf("the page's words changed; look at the difference and run with -update\n%s", firstDifference(string(want), got))
	}
}

func firstDifference(want, got string) string {
	w, g := strings.Split(want, "\n"), strings.Split(got, "\n")
	for i := range max(len(w), len(g)) {
		a, b := "", ""
		if i < len(w) {
			a = w[i]
		}
		if i < len(g) {
			b = g[i]
		}
		if a != b {
			return fmt.Sprintf("line %d\nwant %s\ngot  %s", i+1, a, b)
		}
	}
	return ""
}

// TestPageSections: the answer comes first, the questions in their order, and
// a part that is missing leaves no trace.
func TestPageSections(t *testing.T) {
	all := sampleBundle()
	if !strings.Contains(pageOf(t, all), "With care. 1 run") {
		t.Error("a doubtful verdict does not lead")
	}
	ids := regexp.MustCompile(`<section id="([a-z]+)"`)
	for _, c := range []struct {
		name   string
		bundle Bundle
		want   string
	}{
		{"all", all, "log heater gains replay drift watch cautions provenance"},
		{"runs", Bundle{Runs: all.Runs}, "log cautions provenance"},
		{"card", Bundle{Card: all.Card}, "heater watch cautions provenance"},
		{"gains", Bundle{Gains: all.Gains}, "gains watch cautions provenance"},
		{"replay", Bundle{Replay: all.Replay}, "replay watch cautions provenance"},
		{"drift", Bundle{Drift: all.Drift}, "drift watch cautions provenance"},
		{"nothing", Bundle{}, "cautions"},
	} {
		page := pageOf(t, c.bundle)
		var got []string
		for _, m := range ids.FindAllStringSubmatch(page, -1) {
			got = append(got, m[1])
		}
		if s := strings.Join(got, " "); s != c.want {
			t.Errorf("%s: sections %q, want %q", c.name, s, c.want)
		}
		if strings.Index(page, `<div class="answer">`) > strings.Index(page, "<section") {
			t.Errorf("%s: the answer does not come first", c.name)
		}
		if strings.Contains(page, "NaN") || strings.Contains(page, "%!") {
			t.Errorf("%s: a number or a format went wrong", c.name)
		}
	}
}

// TestAnswerFollowsVerdict: the top of the page says no when anything below
// says no.
func TestAnswerFollowsVerdict(t *testing.T) {
	for _, c := range []struct {
		name string
		edit func(*Bundle)
		want string
		sign string
	}{
		{"meets, no run shows it", func(b *Bundle) { b.Replay.Summary.Judged = 0 }, "Enter these gains", "good"},
		{"meets, all runs", func(b *Bundle) { b.Replay.Summary.Meets = true }, "Enter these gains", "good"},
		{"meets, not all runs", func(b *Bundle) {}, "do not hold on every past run", "bad"},
		{"meets, back-test fails", func(b *Bundle) { b.Replay.Runs[1].BackTest.Reproduced = false }, "not proven on past runs", "bad"},
		{"nearest miss", func(b *Bundle) { b.Gains.Meets = false }, "No gains meet the requirement; these come nearest", "bad"},
		{"never judged", func(b *Bundle) { b.Gains.Nominal, b.Gains.Worst, b.Gains.Meets = nil, nil, false }, "as they were written down", ""},
		{"a rule that fails", func(b *Bundle) { b.Gains.Meets, b.Gains.Rule = false, "simc" }, "These gains do not meet the requirement", "bad"},
	} {
		b := sampleBundle()
		c.edit(&b)
		a := answerOf(&b)
		sign := ""
		if a.Verdict != nil {
			sign = a.Verdict.Sign
		}
		if !strings.Contains(a.Headline, c.want) || sign != c.sign {
			t.Errorf("%s: %q, %q", c.name, a.Headline, sign)
		}
	}
}

func TestPageSameBytes(t *testing.T) {
	first, second := pageOf(t, sampleBundle()), pageOf(t, sampleBundle())
	if first != second {
		t.Error("two pages of one bundle differ")
	}
}

// TestPageSelfContained: nothing is fetched, and the only script that may run
// is ours.
func TestPageSelfContained(t *testing.T) {
	page := pageOf(t, sampleBundle())
	for _, no := range []string{"http:", "https:", "//fonts", "@import", " src=", "<link", "<img", "<iframe", "<object"} {
		if strings.Contains(page, no) {
			t.Errorf("the page contains %q", no)
		}
	}
	if m := regexp.MustCompile(`url\([^#]`).FindString(page); m != "" { // url(#id) stays on the page
		t.Errorf("the page contains %q", m)
	}
	for _, m := range regexp.MustCompile(`href="([^"]*)"`).FindAllStringSubmatch(page, -1) {
		if !strings.HasPrefix(m[1], "#") || !strings.Contains(page, `id="`+m[1][1:]+`"`) {
			t.Errorf("a link leads to %q", m[1])
		}
	}
	if !strings.Contains(page, "default-src &#39;none&#39;") {
		t.Error("the page does not forbid outside resources")
	}
}

// TestPageSmall: many long logs and replays stay under a megabyte.
func TestPageSmall(t *testing.T) {
	b := sampleBundle()
	long, curves := sampleRun(20000)
	b.Runs, b.Curves = nil, nil
	for range 60 {
		b.Runs, b.Curves = append(b.Runs, long), append(b.Curves, curves)
	}
	run := b.Replay.Runs[0]
	for i := range 200 {
		run.Reasons = []string{fmt.Sprintf("settling %d s, 60 s asked", 61+i)}
		b.Replay.Runs = append(b.Replay.Runs, run)
	}
	if n := len(pageOf(t, b)); n >= 1<<20 {
		t.Errorf("the page has %d bytes", n)
	}
}

// hostile is text that a file may carry to make a page do something.
const hostile = "\"><script>document.title='owned'</script><img src=x onerror=document.title='owned'>=cmd()\x1b[31m\u202egnp.\u2066{{.}}</style></title>&amp;"

func hostileBundle() Bundle {
	b := sampleBundle()
	r := b.Runs[0]
	r.Source.File, r.Source.Name = hostile+".csv", hostile
	r.Source.Columns = data.Columns{Time: hostile, Input: hostile, Temperature: hostile}
	r.Units.Input, r.Units.Temperature = hostile, hostile
	r.Quality.Missing = map[string]int{hostile: 3}
	r.Quality.Dropped = map[string]int{hostile: 3}
	r.Quality.Notes = []data.Note{{Code: hostile, Text: hostile, Row: 3}}
	c := b.Card
	c.Source[0].File, c.Source[0].SHA256, c.Source[0].Columns = hostile, hostile, map[string]string{"time": hostile}
	c.Units.Input, c.Units.Temperature, c.Tool, c.Created, c.Schema = hostile, hostile, hostile, hostile, hostile
	c.Warnings = []fit.Warning{{Code: hostile, Text: hostile}}
	c.Cautions = []string{hostile}
	c.Selected, c.Models[0].Structure = hostile, hostile
	c.Models[0].Parameters[0].Name, c.Models[0].Parameters[0].Unit = hostile, hostile
	g := b.Gains
	g.Controller, g.Form, g.Rule, g.Action = hostile, hostile, hostile, hostile
	g.Units.Input, g.Units.Temperature = hostile, hostile
	g.Reasons, g.Cautions, g.Cures = []string{hostile}, []string{hostile}, []string{hostile}
	g.Schedule = []tune.ScheduleEntry{{Card: hostile}}
	g.Entry = []tune.Entry{{Name: hostile, Value: 1, Unit: hostile}}
	b.Drift.Hints, b.Drift.Warnings = []string{hostile}, []string{hostile}
	b.Drift.Runs[0].File, b.Drift.Parameters[0].Name, b.Drift.Parameters[0].Text = hostile, hostile, hostile
	g.Candidates[0].Rule, g.Candidates[0].Note = hostile, hostile
	b.Replay.Gains = *g
	b.Replay.Card = hostile
	b.Replay.Failed = []validate.FailedRun{{File: hostile, Reason: hostile}}
	for i := range b.Replay.Runs {
		p := &b.Replay.Runs[i]
		p.File, p.Name, p.SHA256, p.Reasons, p.Warnings = hostile, hostile, hostile, []string{hostile}, []string{hostile}
	}
	b.Tool, b.Command = hostile, hostile
	b.Checks[0].Loop = fit.Loop{State: hostile, Reason: hostile}
	b.Checks[0].Verdict[0] = fit.Verdict{Parameter: hostile, Verdict: hostile, Reason: hostile, Cures: []string{hostile}}
	b.Checks[0].Caution = []string{hostile}
	return b
}

func TestPageHostileText(t *testing.T) {
	page := pageOf(t, hostileBundle())
	if n := strings.Count(page, "<script"); n != 1 {
		t.Errorf("%d scripts on the page, want ours alone", n)
	}
	for _, no := range []string{"<img", "onerror=document.title='owned'>", "\x1b", "\u202e", "\u2066"} {
		if strings.Contains(page, no) {
			t.Errorf("the page contains %q", no)
		}
	}
	if i := strings.IndexFunc(page, func(r rune) bool { return unicode.IsControl(r) && r != '\n' && r != '\t' }); i >= 0 {
		t.Errorf("control character at byte %d", i)
	}
	if !strings.Contains(outline(page), `=cmd()\x1b[31m\u202egnp.\u2066{{.}}</style></title>&amp;`) {
		t.Error("the text is not shown literally")
	}
}

// TestPageAccessible: what a checker cannot see without a browser.
func TestPageAccessible(t *testing.T) {
	page := pageOf(t, sampleBundle())
	for _, svg := range regexp.MustCompile(`<svg[^>]*>`).FindAllString(page, -1) {
		alt := regexp.MustCompile(`aria-label="([^"]*)"`).FindStringSubmatch(svg)
		if !strings.Contains(svg, `role="img"`) || alt == nil || len(alt[1]) < 40 {
			t.Errorf("no telling text on %s", svg)
		}
	}
	tables := strings.Count(page, "<table")
	if tables < 8 || strings.Count(page, "<caption>") != tables || strings.Count(page, "<thead") != tables {
		t.Errorf("%d tables, %d captions, %d heads", tables, strings.Count(page, "<caption>"), strings.Count(page, "<thead"))
	}
	if !strings.Contains(page, `<html lang="en">`) {
		t.Error("no language")
	}
}
