package main

import (
	"context"
	"path/filepath"
	"strings"

	"lagwright/tune"
	"lagwright/validate"
)

// compare replays the files with every card under every set of gains and
// sets the results side by side.
func (o *validateOptions) compare(ctx context.Context, c *console, cards, files []string) error {
	if o.plot.path != "" || isTable(c.output) {
		return usageErrorf("a comparison is text or JSON; leave --plot out and name the output .json")
	}
	var labels []string
	var replays []*validate.Replay
	met := false
	for _, card := range cards {
		for _, gains := range o.gains {
			replay, err := o.replay(ctx, c, card, gains, files, false)
			if err != nil {
				return err
			}
			labels = append(labels, columnLabel(card, gains, len(cards), len(o.gains)))
			replays = append(replays, replay)
			met = met || replay.Summary.Meets
		}
	}
	comparison, err := validate.Compare(labels, replays)
	if err != nil {
		return err
	}
	if err := c.deliver(comparison); err != nil {
		return err
	}
	if !met {
		return answerNof("none of %s meets the requirement in every run", strings.Join(labels, ", "))
	}
	return nil
}

// columnLabel names what differs between the columns.
func columnLabel(card, gains string, cards, sets int) string {
	card = filepath.Base(card)
	if !tune.WrittenOut(gains) {
		gains = filepath.Base(gains)
	}
	switch {
	case cards == 1:
		return gains
	case sets == 1:
		return card
	}
	return card + " " + gains
}
