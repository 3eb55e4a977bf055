package report

import "lagwright/ident"

// Curves is a fitted model beside one log.
type Curves struct {
	T, Fitted, Low, High []float64 // low and high: the band of the fitted output
	Residual, Whitened   []float64 // log minus model; after the noise model
	ACF                  []float64 // of Whitened, from lag 1 on
	ACFBound             float64
	Bumps                []ident.Bump
}
