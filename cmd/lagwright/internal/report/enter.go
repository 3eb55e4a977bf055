package report

import (
	"unicode/utf8"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/tune"
)

// setting is one field of a controller as someone types it in.
type setting struct{ Name, Value string }

// longestUnbroken is the value that still fits beside its label on a phone; no
// number with its unit is longer, only a unit that somebody made up.
const longestUnbroken = 22

// Long tells a value that must be broken.
func (s setting) Long() bool { return utf8.RuneCountInString(s.Value) > longestUnbroken }

// entryDigits are the digits of a number that someone types in.
const entryDigits = 4

// settings are the fields of the controller's face plate, in the order they
// are usually asked for: the entries of the file where it has them.
// fahrenheit says that the log is in °F, and the controller perhaps too.
func settings(g *tune.Gains, fahrenheit bool) []setting {
	numbers := entries(g)
	if q := g.SquareRoot; q != nil {
		numbers = append(numbers, tune.Entry{Name: "gain with a square root between controller and drive", Value: q.Kc, Unit: q.Unit})
	}
	var s []setting
	for _, e := range numbers {
		both := []tune.Entry{e}
		if fahrenheit {
			both = InBothDegrees(e)
		}
		for _, e := range both {
			s = append(s, setting{sentenceCase(e.Name), format.Amount(e.Value, e.Unit, entryDigits)})
		}
	}
	s = append(s, setting{"Action", g.Action})
	optional := func(name string, v *float64, unit string) {
		if v != nil {
			s = append(s, setting{name, format.Amount(*v, unit, entryDigits)})
		}
	}
	if g.Scan > 0 {
		optional("Scan time", &g.Scan, "s")
	}
	optional("Output low limit", g.Limits.Min, g.Units.Input)
	optional("Output high limit", g.Limits.Max, g.Units.Input)
	optional("Output rate limit", g.Limits.Rate, g.Units.Input+"/s")
	return s
}

// entries are the numbers of the controller itself.
func entries(g *tune.Gains) []tune.Entry {
	if len(g.Entry) > 0 {
		return g.Entry
	}
	out := []tune.Entry{{Name: "gain Kc", Value: g.Kc, Unit: g.Units.Input + "/" + kelvin(g.Units.Temperature)}}
	if g.Ti != nil {
		out = append(out, tune.Entry{Name: "integral time Ti", Value: *g.Ti, Unit: "s"})
	}
	if g.Td != nil {
		out = append(out, tune.Entry{Name: "derivative time Td", Value: *g.Td, Unit: "s"})
	}
	if g.Filter > 0 {
		out = append(out, tune.Entry{Name: "filter time", Value: g.Filter, Unit: "s"})
	}
	out = append(out, tune.Entry{Name: "setpoint weight", Value: g.SetpointWeight})
	if g.Controller == "p" {
		out = append(out, tune.Entry{Name: "bias", Value: g.Bias, Unit: g.Units.Input})
	}
	return out
}
