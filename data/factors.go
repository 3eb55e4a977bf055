package data

import (
	"fmt"
	"regexp"
	"strings"
	"sync"
)

// beside is the unit in a name, as it may stand right behind a factor.
const beside = `[\s_]*(?:[\[({]\s*)?(?:[°º℃℉%]|deg|celsius|kelvin|[cfkvw]\b|m[va]\b|kw\b)`

var (
	// timesTen is x10 or *100 at the end of a name, or right in front of its unit.
	timesTen = sync.OnceValue(func() *regexp.Regexp {
		return regexp.MustCompile(`(?i)[x×*] ?10{1,3}(?:[)\]}]?$|` + beside + `)`)
	})

	// tenthOf is 1/10 or 0.1 right in front of the unit, in brackets or behind
	// "in": elsewhere 1/10 may be a class of sensors or a zone of ten.
	tenthOf = sync.OnceValue(func() *regexp.Regexp {
		return regexp.MustCompile(`(?i)(?:[\[({]\s*|\b(?:in|en)\s+)(?:1/10{1,3}|0[.,]0{0,2}1)` + beside)
	})

	// decimalTenth is 0.1 right in front of the unit anywhere.
	decimalTenth = sync.OnceValue(func() *regexp.Regexp {
		return regexp.MustCompile(`(?i)(?:^|[\s_])0[.,]0{0,2}1` + beside)
	})
)

// resolution are words for what 0.01 °C may be beside a factor.
var resolution = vocabulary{words: []string{"res", "resol", "resolution", "auflösung", "résolution", "resolución", "risoluzione", "accuracy", "precision", "step", "±", "pt100", "pt1000", "rtd", "din", "class", "klasse", "classe"}}

// namesFactor tells a name with a factor that the values of the column carry.
func namesFactor(label string) bool {
	if !strings.Contains(label, "1") {
		return false // every factor holds one
	}
	if at := timesTen().FindStringIndex(label); at != nil && multiplies(label, at[0]) {
		return true
	}
	return !resolution.in(column{name: label}) && (tenthOf().MatchString(label) || decimalTenth().MatchString(label))
}

// multiplies tells that the sign at a place of a name stands for itself: not
// within a word, nor between numbers, as in 3 x 10 cm.
func multiplies(label string, at int) bool {
	ahead := label[:at]
	near := strings.TrimRight(ahead, " ")
	switch {
	case near == "":
		return true
	case isPlainNumber(near[len(near)-1:]):
		return false
	}
	return label[at]|0x20 != 'x' || near != ahead || strings.ContainsAny(ahead[len(ahead)-1:], " _-([{")
}

// refuseFactor refuses a column whose name holds a factor beside its unit: read
// in that unit, its values would be too large. A unit given by hand settles it.
func refuseFactor(label string, r role, settled bool) error {
	if settled || !namesFactor(label) {
		return nil
	}
	flag := "--temp-unit"
	if r == roleInput {
		flag = "--input-unit"
	}
	return fmt.Errorf("column %q names a factor beside its unit: export the %s without it, or, if its values are in that unit as they are, say so with %s", label, roleNames[r], flag)
}
