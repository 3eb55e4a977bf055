package ident

import "fmt"

// Law says how the input drives the heat: phi(u) = u, or u² (an RMS voltage
// on a resistance).
type Law int

const (
	Linear Law = iota // phi(u) = u
	Power             // phi(u) = u²
)

// ParseLaw returns the law called linear or power.
func ParseLaw(name string) (Law, error) {
	switch name {
	case "linear":
		return Linear, nil
	case "power":
		return Power, nil
	}
	return 0, fmt.Errorf("unknown input law %q: use linear or power", name)
}

// String returns "linear" or "power".
func (l Law) String() string {
	if l == Power {
		return "power"
	}
	return "linear"
}

// Apply returns phi(u).
func (l Law) Apply(u float64) float64 {
	if l == Power {
		return u * u
	}
	return u
}

// Slope returns dphi/du at u: what turns the gain of a card into the gain
// about an operating input.
func (l Law) Slope(u float64) float64 {
	if l == Power {
		return 2 * u
	}
	return 1
}
