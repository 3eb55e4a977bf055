package report

import (
	"slices"
	"strings"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/tune"
)

// noteFahrenheit is the code under which data and fit say that a log is in °F.
const noteFahrenheit = "fahrenheit"

// LoggedInFahrenheit tells a card whose log is in °F: everything is computed in
// °C and K, and the controller may work in either.
func LoggedInFahrenheit(c *fit.Card) bool {
	return c != nil && slices.ContainsFunc(c.Warnings, func(w fit.Warning) bool { return w.Code == noteFahrenheit })
}

// fahrenheit asks the card, else the logs.
func (b *Bundle) fahrenheit() bool {
	return LoggedInFahrenheit(b.Card) || slices.ContainsFunc(b.Runs, func(r *data.Run) bool {
		return slices.ContainsFunc(r.Quality.Notes, func(n data.Note) bool { return n.Code == noteFahrenheit })
	})
}

// kelvinsPerFahrenheit: a degree Fahrenheit is 5/9 K.
const kelvinsPerFahrenheit = 1 / 1.8

// InBothDegrees gives, for an entry per K, the same for a controller that works
// in °C and for one that works in °F, each named so. Other entries do not
// depend on the degrees and come back alone.
func InBothDegrees(e tune.Entry) []tune.Entry {
	over, under, found := strings.Cut(e.Unit, "/")
	if !found || !strings.Contains(under, "K") {
		return []tune.Entry{e}
	}
	f := e
	f.Unit = over + "/" + strings.Replace(under, "K", "°F", 1)
	f.Value *= kelvinsPerFahrenheit
	e.Name += ", controller in °C"
	f.Name += ", controller in °F"
	return []tune.Entry{e, f}
}
