package ident

import "math/cmplx"

// At returns G(s), with the exact dead time; at a pole it is infinite.
func (p Plant) At(s complex128) complex128 {
	g := complex(p.Gain, 0) * cmplx.Exp(-s*complex(p.DeadTime, 0))
	if p.Structure.integrating {
		return g / s
	}
	times := 1
	if p.Structure.equal {
		times = p.Structure.order
	}
	product := complex(1, 0)
	for _, tau := range p.Lags {
		element := s*complex(tau, 0) + 1
		for range times {
			product *= element
		}
	}
	return g / product
}

// Response returns G(jw) at the angular frequency w in rad/s.
func (p Plant) Response(w float64) complex128 { return p.At(complex(0, w)) }
