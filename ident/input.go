package ident

// Input is a piecewise constant input: Before until At[0], then Value[i] from
// At[i] until At[i+1]. At is strictly ascending, in s.
type Input struct {
	Before float64
	At     []float64
	Value  []float64
}

// HeldInput returns the input that a log records: u[k] drives the heater
// through the law from t[k] until t[k+1], and u[0] did so before the first
// row. t is in s and ascending; u has its length. Rows that repeat the value
// before them are no changes. The input may change at every row.
func HeldInput(t, u []float64, law Law) Input {
	if len(u) == 0 {
		return Input{}
	}
	in := Input{Before: law.Apply(u[0])}
	last := in.Before
	for k := range u {
		if k > 0 && u[k] == u[k-1] { // as nearly every row of a bump test
			continue
		}
		if v := law.Apply(u[k]); v != last {
			in.At = append(in.At, t[k])
			in.Value = append(in.Value, v)
			last = v
		}
	}
	return in
}
