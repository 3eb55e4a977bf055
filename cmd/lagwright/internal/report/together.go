package report

import (
	"regexp"
	"strings"
)

// numberAndUnit is a number and the unit behind it, or the three digits that a
// long number goes on with.
var numberAndUnit = regexp.MustCompile(`(\d) (%|°C|°F|(?:K|V|mA|ms|s|min|h|d|\d{3})\b)`)

var signs = strings.NewReplacer(" ± ", "\u00a0±\u00a0", "= ", "=\u00a0")

// together keeps a number, its bound and its unit on one line.
func together(s string) string {
	return numberAndUnit.ReplaceAllString(signs.Replace(s), "$1\u00a0$2")
}
