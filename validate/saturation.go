package validate

import (
	"fmt"
	"math"
	"strings"
)

// sittingShare is the share of the rows from which on an input that sits at
// its highest or lowest value is worth a word (common practice, no source).
const sittingShare = 0.05

// saturation says when the input sat at a limit of the logged gains.
func (p *plan) saturation(courses []*course) []string {
	limits := p.logged.Limits
	var out []string
	say := func(name string, limit *float64, sign float64) {
		if limit == nil {
			return
		}
		if share, _ := atEdge(courses, sign, sign**limit-slack); share > sittingShare {
			out = append(out, fmt.Sprintf("the input sits at its %s limit on %.0f%% of the rows, where the loop is open", name, 100*share))
		}
	}
	say("upper", limits.Max, 1)
	say("lower", limits.Min, -1)
	return out
}

// atEdge returns the share of the rows at which sign·input reaches edge, and
// how many of them follow each other at most.
func atEdge(courses []*course, sign, edge float64) (share float64, longest int) {
	rows, at := 0, 0
	for _, c := range courses {
		stretch := 0
		for _, u := range c.u {
			rows++
			if sign*u < edge {
				stretch = 0
				continue
			}
			at++
			stretch++
			longest = max(longest, stretch)
		}
	}
	return float64(at) / float64(rows), longest
}

// limitHint finds a limit that was in force but stands not in the logged gains:
// the input stays at its highest or lowest value for a part of the run, and
// with a limit there the loop comes nearer to what was logged. It is looked for
// first, since at a limit the input moves less than the gains ask for, which
// otherwise would look like another gain.
func (p *plan) limitHint(courses []*course, asked nearness) (string, error) {
	stated, err := p.compareInputs(p.logged, courses, asked)
	if err != nil {
		return "", err
	}
	gains := *p.logged
	var found []string
	try := func(name, field string, limit **float64, sign float64) {
		edge := math.Inf(-1)
		for _, c := range courses {
			edge = max(edge, greatest(scaled(c.u, sign)))
		}
		share, longest := atEdge(courses, sign, edge-slack*max(1, math.Abs(edge)))
		if *limit != nil && sign**(*limit) <= edge || share <= sittingShare || longest < minSitting {
			return
		}
		value := sign * edge
		*limit = &value
		found = append(found, fmt.Sprintf("%s %s, where the input stays on %.0f%% of the rows (limits.%s)", name, quantity(value, p.units.input), 100*share, field))
	}
	try("an upper limit of", "max", &gains.Limits.Max, 1)
	try("a lower limit of", "min", &gains.Limits.Min, -1)
	if len(found) == 0 {
		return "", nil
	}
	limited, err := p.compareInputs(&gains, courses, asked)
	if err != nil || limited.near < p.options.Confidence && limited.rmsU > stated.rmsU/2 {
		return "", err
	}
	explains := "would explain it"
	if limited.near < p.options.Confidence {
		explains = "would explain most of it"
	}
	return fmt.Sprintf("%s %s: state it in the logged gains", strings.Join(found, " and "), explains), nil
}

// minSitting is the fewest rows in a row at its edge that make an input sit.
const minSitting = 5

func scaled(x []float64, by float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = by * v
	}
	return out
}
