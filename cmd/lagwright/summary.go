package main

import (
	"encoding/json"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/cmd/lagwright/internal/report"
	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
	"lagwright/validate"
)

// finish says on standard output what came out, and where the page is.
func (j *job) finish(c *console, folder string) error {
	var err error
	if c.json {
		err = j.writeJSON(c.out, folder)
	} else {
		if err = c.sketchLog(j.bump[0], j.curves[0]); err == nil {
			err = c.text(func(w io.Writer) error { return j.summary(w, folder) })
		}
	}
	if err != nil {
		return err
	}
	if err := gainsVerdict(j.gains); err != nil {
		return err
	}
	if j.replay.Summary.Judged == 0 {
		return nil // the runs show nothing of the requirement: the gains have the say
	}
	return replayVerdict(j.replay)
}

func (j *job) writeJSON(w io.Writer, folder string) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	return e.Encode(struct {
		Folder string           `json:"folder"`
		Card   *fit.Card        `json:"card"`
		Gains  *tune.Gains      `json:"gains"`
		Replay *validate.Replay `json:"replay"`
	}{folder, j.card, j.gains, j.replay})
}

// summary is what a person can act on, in 80 columns.
func (j *job) summary(w io.Writer, folder string) error {
	s := &rows{w: w}
	for _, run := range j.bump {
		s.add("log", logWords(run))
	}
	s.add("heater", modelWords(j.card))
	for _, warning := range j.card.Warnings {
		s.add("warning", warning.Text)
	}
	if j.gains.Unstable() {
		s.add("enter", "nothing: with the nearest gains that were found the loop would be unstable on plausible plants")
	} else {
		s.add("enter", gainsWords(j.gains, report.LoggedInFahrenheit(j.card)))
	}
	s.add("", requirementWords(j.gains))
	for _, reason := range j.gains.Reasons {
		s.add("", reason)
	}
	for _, doubt := range report.GraveDoubts(j.bundle("")) {
		s.add("doubt", doubt)
	}
	for _, cure := range j.gains.Cures {
		s.add("try", cure)
	}
	for i := range j.replay.Runs {
		s.add("replay", replayWords(&j.replay.Runs[i], j.card.Units.Temperature))
	}
	for _, failed := range j.replay.Failed {
		s.add("replay", failed.File+": not replayed: "+failed.Reason)
	}
	for _, caution := range j.gains.Cautions {
		s.add("caution", caution)
	}
	s.add("open", filepath.Join(folder, "report.html"))
	return s.err
}

// rows writes lines of a label and a text wrapped beside it.
type rows struct {
	w    io.Writer
	last string
	err  error
}

func (r *rows) add(label, text string) {
	const margin = 9
	shown := label
	if label == r.last {
		shown = "" // the label of several lines is written once
	}
	if label != "" {
		r.last = label
	}
	for _, line := range wrap(format.Text(text), columns-margin) {
		if r.err == nil {
			_, r.err = fmt.Fprintln(r.w, strings.TrimRight(fmt.Sprintf("%-*s%s", margin, shown, line), " "))
		}
		shown = ""
	}
}

func logWords(run *data.Run) string {
	last := run.T[len(run.T)-1]
	words := fmt.Sprintf("%s: %s over %s, every %s", run.Source.File, format.Count(len(run.T), "row", "rows"),
		format.Duration(last), format.Duration(run.Quality.MedianInterval))
	missing := 0
	for _, n := range run.Quality.Missing {
		missing += n
	}
	if missing > 0 {
		words += fmt.Sprintf("; %s without a reading", format.Count(missing, "row", "rows"))
	}
	return words
}

func modelWords(card *fit.Card) string {
	model, ok := card.Model(card.Selected)
	if !ok {
		return card.Selected
	}
	var parts []string
	for _, p := range model.Parameters {
		if p.Name == "baseline" || p.Name == "drift" {
			continue
		}
		name := strings.ReplaceAll(p.Name, "_", " ")
		parts = append(parts, name+" "+format.Value(p.Value, p.Low, p.High, p.Unit))
	}
	return fmt.Sprintf("%s: %s (%s intervals)", model.Structure, strings.Join(parts, ", "), format.Percent(card.Confidence))
}

// gainsWords are the numbers as they are entered at the controller; of a log in
// °F for one that works in °C and for one that works in °F.
func gainsWords(g *tune.Gains, fahrenheit bool) string {
	var parts []string
	for _, e := range g.Entry {
		words := e.Name + " " + format.Amount(e.Value, e.Unit, 4)
		if both := report.InBothDegrees(e); fahrenheit && len(both) > 1 {
			words += " (controller in °C) or " + format.Amount(both[1].Value, both[1].Unit, 4) + " (controller in °F)"
		}
		parts = append(parts, words)
	}
	return fmt.Sprintf("%s, %s form, %s acting: %s", strings.ToUpper(g.Controller), g.Form, g.Action, strings.Join(parts, ", "))
}

// kelvins is the unit of a difference of temperatures.
func kelvins(unit string) string {
	if unit == "degC" {
		return "K"
	}
	return unit
}

func requirementWords(g *tune.Gains) string {
	share, asked := format.Percent(g.ShareMeeting), g.Requirement.Words(g.Units)
	if g.Meets {
		return fmt.Sprintf("meets %s on %s of plausible plants", asked, share)
	}
	return fmt.Sprintf("misses %s: holds on %s of plausible plants, asked for %s", asked, share, format.Percent(g.Assurance))
}

func replayWords(r *validate.RunReplay, unit string) string {
	words := r.File
	if r.Name != "" {
		words += ", run " + r.Name
	}
	switch {
	case r.Undecided():
		words += ": not judged"
	case !r.Judged:
		words += ": nothing of the requirement shows in this run"
	case r.Meets:
		words += ": meets the requirement"
	default:
		words += ": misses the requirement"
	}
	if b := r.BackTest; b != nil && !b.Reproduced {
		words += "; " + b.Failure()
	}
	k := kelvins(unit)
	compare := func(what string, pick func(validate.RunMetrics) *float64, unit string) {
		now := pick(r.Proposed.Median)
		if now == nil {
			return
		}
		words += fmt.Sprintf("; %s %s", what, format.Amount(*now, unit, 3))
		if was := pick(r.Logged); was != nil {
			words += fmt.Sprintf(" (logged %s)", format.Amount(*was, unit, 3))
		}
	}
	words += settlingWords(r)
	compare("largest deviation", func(m validate.RunMetrics) *float64 { return m.Deviation }, k)
	compare("error area", func(m validate.RunMetrics) *float64 { return m.IAE }, k+"*s")
	compare("peak", func(m validate.RunMetrics) *float64 { return m.PeakTemp }, unit)
	return words
}

// settlingWords give the settling times of a run, in one unit: as proposed,
// with noise and as logged.
func settlingWords(r *validate.RunReplay) string {
	now, noisy, was := r.Proposed.Median.Settling, r.WithNoise.Settling, r.Logged.Settling
	if now == nil {
		return ""
	}
	unit, size := format.TimeUnit(now, noisy, was)
	var beside []string
	if noisy != nil {
		beside = append(beside, "with noise "+format.Amount(*noisy/size, unit, 3))
	}
	if was != nil {
		beside = append(beside, "logged "+format.Amount(*was/size, unit, 3))
	}
	words := "; settles in "
	if !r.Judged {
		words = "; a step of the setpoint would settle in "
	}
	words += format.Amount(*now/size, unit, 3)
	if len(beside) > 0 {
		words += " (" + strings.Join(beside, ", ") + ")"
	}
	return words
}
