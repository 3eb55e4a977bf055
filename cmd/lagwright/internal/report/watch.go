package report

import (
	"fmt"
	"slices"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
)

// watch answers: what should I watch for? Warnings of the model, what fails
// of the requirement, and what replays could not say.
func watch(b *Bundle) *section {
	var items []item
	if b.Card != nil {
		for _, w := range b.Card.Warnings {
			items = append(items, item{"warn", fmt.Sprintf("%s (%s)", sentenceCase(w.Text), w.Code)})
		}
	}
	if b.Replay != nil {
		for i := range b.Replay.Runs {
			run := &b.Replay.Runs[i]
			sign := "warn" // what fails on the few plants that the assurance leaves fails no run
			if run.Judged && !run.Meets {
				sign = "bad"
			}
			for _, r := range run.Reasons {
				items = append(items, item{sign, runName(run) + ": " + r})
			}
			for _, w := range run.Warnings {
				items = append(items, item{"warn", runName(run) + ": " + w})
			}
		}
		for _, f := range b.Replay.Failed {
			items = append(items, item{"warn", fmt.Sprintf("%s could not be replayed: %s", format.Text(f.File), strings.TrimPrefix(f.Reason, f.File+": "))})
		}
	}
	if b.Drift != nil {
		for _, w := range b.Drift.Warnings {
			items = append(items, item{"warn", sentenceCase(w)})
		}
		for _, f := range b.Drift.Failed {
			items = append(items, item{"warn", fmt.Sprintf("%s could not be fitted: %s", format.Text(f.File), strings.TrimPrefix(f.Reason, f.File+": "))})
		}
	}
	s := &section{ID: "watch", Title: "What to watch for"}
	if len(items) == 0 {
		if b.Card == nil && b.Gains == nil && b.Replay == nil && b.Drift == nil {
			return nil
		}
		s.Lead = "No warning came with these results."
		return s
	}
	s.Blocks = []block{{List: listOf(items)}}
	return s
}

// cautions are shown whatever the result says.
func cautions(b *Bundle) *section {
	var texts []string
	for _, c := range b.Checks {
		if c != nil {
			texts = append(texts, c.Caution...)
		}
	}
	if b.Card != nil {
		texts = append(texts, b.Card.Cautions...)
	}
	if b.Gains != nil {
		texts = append(texts, b.Gains.Cautions...)
	}
	if b.Replay != nil {
		texts = append(texts, b.Replay.Cautions...)
	}
	if b.Drift != nil {
		texts = append(texts, b.Drift.Cautions...)
	}
	var items []item
	var seen []string
	for _, t := range texts {
		if t != fit.CautionCodes && !slices.Contains(seen, t) {
			seen = append(seen, t)
			items = append(items, item{"", t})
		}
	}
	items = append(items, item{"", fit.CautionCodes}) // the caution no page goes without
	return &section{ID: "cautions", Title: "Cautions", Blocks: []block{{List: &list{Items: items}}}}
}
