package report

import (
	"regexp"
	"strings"
	"sync"
)

// numberAndUnit is a number and the unit behind it, or the three digits that a
// long number goes on with.
var numberAndUnit = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`(\d) (%|°C|°F|(?:K|V|mA|ms|s|min|h|d|\d{3})\b)`)
})

// twoUnits is a duration in two units, each already with its number.
var twoUnits = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile("(\\d\u00a0(?:d|h|min)) (\\d+\u00a0(?:h|min|s)\\b)")
})

var signs = strings.NewReplacer(" ± ", "\u00a0±\u00a0", "= ", "=\u00a0")

// together keeps a number, its bound and its unit on one line.
func together(s string) string {
	s = numberAndUnit().ReplaceAllString(signs.Replace(s), "$1\u00a0$2")
	return twoUnits().ReplaceAllString(s, "$1\u00a0$2")
}
