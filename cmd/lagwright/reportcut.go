package main

import (
	"context"
	"slices"
	"strconv"

	"lagwright/data"
	"lagwright/fit"
)

// readAsFitted reads the logs behind a card. One log of which the card was
// fitted to a part is cut to that part, unless the command line says which:
// beside the whole log the figures would not be those of the card.
func (l *logFlags) readAsFitted(ctx context.Context, c *console, card *fit.Card, logs []string) ([]*data.Run, error) {
	runs, err := l.readAll(ctx, c, logs)
	if err != nil || card == nil || len(runs) != 1 || l.options.From != "" || l.options.To != "" || slices.Contains(logs, "-") {
		return runs, err
	}
	part := partOf(card, runs[0])
	if part == nil {
		return runs, nil
	}
	cut := *l
	cut.options.From, cut.options.To = secondsText(part.FromS), secondsText(part.ToS)
	c.note("%s: read from %s to %s s, the part that the card was fitted to", runs[0].Source.File, cut.options.From, cut.options.To)
	return cut.readAll(ctx, c, logs)
}

// partOf is the card's source for a run that holds the same file and more of it.
func partOf(card *fit.Card, run *data.Run) *fit.CardSource {
	for i := range card.Source {
		s := &card.Source[i]
		if s.SHA256 == run.Source.SHA256 && (s.FromS > run.Source.FromS || s.ToS < run.Source.ToS) {
			return s
		}
	}
	return nil
}

func secondsText(s float64) string { return strconv.FormatFloat(s, 'f', -1, 64) }
