package validate

import "fmt"

// saturation says when the input sat at a limit of the logged gains.
func (p *plan) saturation(courses []*course) []string {
	var rows, high, low int
	limits := p.logged.Limits
	for _, c := range courses {
		for _, u := range c.u {
			rows++
			if limits.Max != nil && u >= *limits.Max-slack {
				high++
			}
			if limits.Min != nil && u <= *limits.Min+slack {
				low++
			}
		}
	}
	var out []string
	for _, s := range []struct {
		n    int
		name string
	}{{high, "upper"}, {low, "lower"}} {
		if share := float64(s.n) / float64(rows); share > 0.05 {
			out = append(out, fmt.Sprintf("the input sits at its %s limit on %.0f%% of the rows, where the loop is open", s.name, 100*share))
		}
	}
	return out
}
