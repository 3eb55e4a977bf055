package data

import (
	"fmt"
	"regexp"
)

// factorInName finds a factor that the values of a column carry: x10, *100, in
// 1/10 °C, in 0,1 V.
var factorInName = regexp.MustCompile(`(?i)((^|[^a-z0-9])x|[×*]) ?10{1,3}($|[^0-9])|(^|[^0-9.,])(1/10{1,3}|0[.,]0{0,2}1) ?(°|deg|c$|v$|%)|/ ?10{1,3}($|[^0-9])`)

// refuseFactor refuses a column whose name holds a factor beside its unit: read
// in that unit, its values would be too large. A unit given by hand settles it.
func refuseFactor(label string, r role, settled bool) error {
	if settled || !factorInName.MatchString(label) {
		return nil
	}
	flag := "--temp-unit"
	if r == roleInput {
		flag = "--input-unit"
	}
	return fmt.Errorf("column %q names a factor beside its unit: export the %s without it, or, if its values are in that unit as they are, say so with %s", label, roleNames[r], flag)
}
