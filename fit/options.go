package fit

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// Options steers a fit. The zero value is ready to use.
type Options struct {
	Structure   string             // one structure; "" or "auto" tries all
	Fix         map[string]float64 // known parameters: gain, lag1, …, dead_time
	Noise       string             // "auto" ("" too) or "white": plain least squares on the simulated output
	Drift       string             // "auto" (""), "none" or "linear"
	Initial     string             // "auto" (""), "rest", "earlier" or "free"
	BumpInstant string             // "row" (""): a row's input holds from its time stamp on; "unknown"
	Confidence  float64            // level of every interval; 0 means 0.95
	Plants      int                // plausible plants kept in the card; 0 means 200, below 0 none
	Rand        int64              // seed of every random draw
	Law         ident.Law          // how the input drives the heat
	Workers     int                // fits run side by side; 0 means one per core; no effect on the result
	Tool        string             // written into the card

	// Progress, when not nil, is told how many of the structures are done.
	Progress func(done, total int)

	// quick leaves out what brings a long log's optimum to every row: a verdict
	// does not need it.
	quick bool
}

func (o Options) withDefaults() (Options, error) {
	def := func(s *string, v string) {
		if *s == "" {
			*s = v
		}
	}
	def(&o.Structure, "auto")
	def(&o.Noise, "auto")
	def(&o.Drift, "auto")
	def(&o.Initial, "auto")
	def(&o.BumpInstant, "row")
	if o.Confidence == 0 {
		o.Confidence = 0.95
	}
	if o.Plants == 0 {
		o.Plants = 200
	}
	oneOf := func(name, v string, allowed ...string) error {
		for _, a := range allowed {
			if v == a {
				return nil
			}
		}
		return fmt.Errorf("%w: %s %q is not one of %v", ErrOption, name, v, allowed)
	}
	for _, err := range []error{
		oneOf("noise", o.Noise, "auto", "white"),
		oneOf("drift", o.Drift, "auto", "none", "linear"),
		oneOf("initial", o.Initial, "auto", "rest", "earlier", "free"),
		oneOf("bump-instant", o.BumpInstant, "row", "unknown"),
	} {
		if err != nil {
			return o, err
		}
	}
	if !(o.Confidence > 0.5 && o.Confidence < 1) {
		return o, fmt.Errorf("%w: confidence %g is not between 0.5 and 1", ErrOption, o.Confidence)
	}
	if o.Plants > 100000 {
		return o, fmt.Errorf("%w: %d plants are more than 100000", ErrOption, o.Plants)
	}
	if o.Structure != "auto" {
		if _, err := ident.ParseStructure(o.Structure); err != nil {
			return o, fmt.Errorf("%w: %w", ErrOption, err)
		}
	}
	for name, v := range o.Fix {
		i := lagIndex(name)
		if name != "gain" && name != "dead_time" && i < 0 {
			return o, fmt.Errorf("%w: fix %q is not gain, lag1, lag2, … or dead_time", ErrOption, name)
		}
		if math.IsNaN(v) || math.IsInf(v, 0) || (i >= 0 && v <= 0) || (name == "dead_time" && v < 0) || (name == "gain" && v == 0) {
			return o, fmt.Errorf("%w: fix %s=%g is not possible", ErrOption, name, v)
		}
	}
	return o, nil
}

// structures lists the structures to try: those that have every lag the user
// fixes.
func (o Options) structures() ([]ident.Structure, error) {
	all := ident.Structures()
	if o.Structure != "auto" {
		s, err := ident.ParseStructure(o.Structure)
		if err != nil {
			return nil, fmt.Errorf("%w: %w", ErrOption, err)
		}
		all = []ident.Structure{s}
	}
	var out []ident.Structure
	for _, s := range all {
		fits := true
		for name := range o.Fix {
			fits = fits && lagIndex(name) < s.NumLags()
		}
		if fits {
			out = append(out, s)
		}
	}
	if len(out) == 0 {
		return nil, fmt.Errorf("%w: fix names a lag that %s does not have; leave it out, or take a chain with more lags", ErrOption, o.Structure)
	}
	return out, nil
}
