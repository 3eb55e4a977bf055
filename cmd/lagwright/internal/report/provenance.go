package report

import (
	"fmt"
	"slices"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/data"
	"lagwright/fit"
)

// provenance says how someone else can check the page: which file, which
// rows, which program, which command.
func provenance(b *Bundle) *section {
	s := &section{ID: "provenance", Title: "Provenance"}
	if t := sourceTable(b); len(t.Rows) > 0 {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	if t := versionTable(b); len(t.Rows) > 0 {
		s.Blocks = append(s.Blocks, block{Table: t})
	}
	if b.Command != "" {
		s.Blocks = append(s.Blocks, block{Text: "The exact command to make this again:", Code: b.Command})
	}
	if len(s.Blocks) == 0 {
		return nil
	}
	return s
}

// source is a file behind the page, whichever part names it.
type source struct{ file, sha, use, rows, kept, start, columns string }

func sourceTable(b *Bundle) *table {
	t := &table{
		Caption: "Files read, each with its SHA-256",
		Head:    []string{"File", "Used for", "Rows", "Kept", "Start", "Columns"},
	}
	all := sources(b)
	for i, s := range all {
		if i == longestList {
			t.More = len(all) - longestList
			break
		}
		t.Rows = append(t.Rows, []cell{{Text: s.file, Small: s.sha, Kind: "code", Header: true}, text(s.use), num(s.rows), num(s.kept), text(strings.Replace(s.start, "T", " ", 1)), text(s.columns)})
	}
	return t
}

func sources(b *Bundle) []source {
	var out []source
	at := map[string]int{} // by hash
	add := func(s source) {
		if i, ok := at[s.sha]; ok && out[i].file == s.file {
			out[i].use += ", " + s.use
			return
		}
		at[s.sha] = len(out)
		out = append(out, s)
	}
	if b.Card != nil {
		for _, s := range b.Card.Source {
			add(cardSource(s))
		}
	}
	for _, r := range b.Runs {
		if s := runSource(r); b.Card == nil || !slices.ContainsFunc(b.Card.Source, func(c fit.CardSource) bool { return c.SHA256 == s.sha }) {
			add(s)
		}
	}
	if b.Replay != nil {
		for i := range b.Replay.Runs {
			r := &b.Replay.Runs[i]
			start := "-"
			if r.Start != nil {
				start = *r.Start
			}
			add(source{runName(r), r.SHA256, "replay", format.Thousands(r.Rows), "-", start, "-"})
		}
	}
	return out
}

func cardSource(s fit.CardSource) source {
	var names []string
	for _, k := range []string{"time", "input", "temperature", "setpoint", "mode", "airflow", "inlet"} {
		if c := s.Columns[k]; c != "" {
			names = append(names, k+": "+format.Text(c))
		}
	}
	start := "-"
	if s.Start != nil {
		start = *s.Start
	}
	return source{s.File, s.SHA256, "model", format.Thousands(s.Rows), keptWords(s.FromS, s.ToS), start, strings.Join(names, ", ")}
}

func runSource(r *data.Run) source {
	c := r.Source.Columns
	start := "-"
	if !r.Start.IsZero() {
		start = r.Start.Format("2006-01-02T15:04:05Z07:00")
	}
	return source{runTitle(r.Source), r.Source.SHA256, "log", format.Thousands(r.Source.Rows), keptWords(r.Source.FromS, r.Source.ToS), start,
		fmt.Sprintf("time: %s, input: %s, temperature: %s", format.Text(c.Time), format.Text(c.Input), format.Text(c.Temperature))}
}

func keptWords(from, to float64) string {
	return format.Short(from, 6) + " to " + format.Amount(to, "s", 6)
}

func versionTable(b *Bundle) *table {
	t := &table{Caption: "Made by", Head: []string{"Part", "Value"}}
	add := func(name, value string) {
		if value != "" {
			t.Rows = append(t.Rows, []cell{head(name), text(value)})
		}
	}
	add("Program", b.Tool)
	if c := b.Card; c != nil {
		add("Model card", schemaAndTool(c.Schema, c.Tool))
		add("Model card dated", dated(c))
		if n := len(c.Plants.Values); n > 0 {
			add("Plausible plants", fmt.Sprintf("%s, structure %s, random seed %d", format.Thousands(n), c.Plants.Structure, c.Plants.Rand))
		}
	}
	if g := b.Gains; g != nil {
		add("Gains", schemaAndTool(g.Schema, g.Tool))
	}
	if r := b.Replay; r != nil {
		add("Replay", schemaAndTool(r.Schema, r.Tool)+", card "+r.Card)
	}
	if d := b.Drift; d != nil {
		add("Drift", schemaAndTool(d.Schema, d.Tool))
	}
	return t
}

// dated is the date of a card.
func dated(c *fit.Card) string {
	if !c.Dated() {
		return "without a date: the log has none"
	}
	return c.Created
}

func schemaAndTool(schema, tool string) string {
	if tool == "" {
		return schema
	}
	return schema + ", made by " + tool
}
