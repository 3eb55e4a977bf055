package ident

import (
	"fmt"
	"strings"
)

const (
	maxElements = 8 // first-order elements of the longest chain, equal8
	maxLags     = 4 // lag parameters of the longest chain of distinct lags, chain4
)

// structures lists every family in the order in which a fit tries them.
var structures = []Structure{
	{name: "fopdt", order: 1},
	{name: "chain2", order: 2},
	{name: "chain3", order: 3},
	{name: "chain4", order: 4},
	{name: "equal2", order: 2, equal: true},
	{name: "equal3", order: 3, equal: true},
	{name: "equal4", order: 4, equal: true},
	{name: "equal5", order: 5, equal: true},
	{name: "equal6", order: 6, equal: true},
	{name: "equal7", order: 7, equal: true},
	{name: "equal8", order: 8, equal: true},
	{name: "ipdt", integrating: true},
}

// Structures returns every structure: fopdt, chain2 to chain4, equal2 to
// equal8, ipdt.
func Structures() []Structure { return append([]Structure(nil), structures...) }

// ParseStructure returns the structure of that name. The error lists the
// names there are.
func ParseStructure(name string) (Structure, error) {
	var names []string
	for _, s := range structures {
		if s.name == name {
			return s, nil
		}
		names = append(names, s.name)
	}
	return Structure{}, fmt.Errorf("unknown structure %q: use one of %s", name, strings.Join(names, ", "))
}

// String returns the structure's name; it is empty for the zero value.
func (s Structure) String() string { return s.name }

// Order is the number of first-order elements; 0 for ipdt.
func (s Structure) Order() int { return s.order }

// NumLags is the number of lag parameters: one for an equal-lag chain, none
// for ipdt, else the order.
func (s Structure) NumLags() int {
	if s.equal {
		return 1
	}
	return s.order
}

// Equal tells an equal-lag chain of two elements or more.
func (s Structure) Equal() bool { return s.equal }

// Integrating tells ipdt.
func (s Structure) Integrating() bool { return s.integrating }
