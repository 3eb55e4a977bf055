package ident

// FreeStates sets dst[j], for each first-order element j counted longest lag
// first, to the response of a chain of unit gain that starts at the first row
// with 1 at the output of that element, nothing at those of the others, and no
// input: what an unknown past leaves behind. There are st.Order() columns of
// one element a row. The elements are chained shortest lag first; any other
// order spans the same space. A lag of zero remembers nothing and its column is
// zero. The dead time comes before the chain and so does not matter; it is
// there to call this method as the others.
func (s *Simulator) FreeStates(dst [][]float64, st Structure, lags []float64, deadTime float64) {
	if !s.prepare(st, lags, deadTime, false) {
		for _, column := range dst[:st.Order()] {
			fillNaN(column)
		}
		return
	}
	n := s.chain.n
	for j := range st.Order() {
		if j >= n || len(s.t) == 0 {
			clear(dst[j])
			continue
		}
		s.release(n - 1 - j)
		s.walk(&outputs{y: dst[j]})
	}
}

// FreeStateSensitivities sets dst[j] as [Simulator.FreeStates] does and
// dst[st.Order() + j·st.NumLags() + i] to the derivative of column j with
// respect to lags[i]. A lag of zero, whose element holds no state, gives zero.
//
// With a start of 1 the output of element j is tau_j/(tau_j·s + 1), so that the
// derivative is (1/tau_j − s·tau_j/(tau_j·s + 1))/tau_j times the column for its
// own lag, as in Sensitivities for the elements after it and zero for those
// before it.
func (s *Simulator) FreeStateSensitivities(dst [][]float64, st Structure, lags []float64, deadTime float64) {
	order, lagCount := st.Order(), st.NumLags()
	if !s.prepare(st, lags, deadTime, true) {
		for _, column := range dst[:order*(1+lagCount)] {
			fillNaN(column)
		}
		return
	}
	c := &s.chain
	for j := range order {
		slopes := dst[order+j*lagCount : order+(j+1)*lagCount]
		if j >= c.n || len(s.t) == 0 {
			clear(dst[j])
			for _, column := range slopes {
				clear(column)
			}
			continue
		}
		element := c.n - 1 - j
		o := outputs{y: dst[j]}
		for i, k := range c.of[:lagCount] {
			if k >= 0 {
				o.v[k] = slopes[i]
			}
		}
		s.release(element)
		s.walk(&o)
		for i, k := range c.of[:lagCount] {
			c.freeSlope(slopes[i], dst[j], element, k)
		}
	}
}

// release puts 1 at the output of an element and switches the input off.
func (s *Simulator) release(element int) {
	s.rewind()
	s.next = len(s.in.At)
	s.x[element] = 1
}

// freeSlope turns the sensitivity state of lag k, as carried from a start of 1
// at the element, into the derivative of that column.
func (c *chain) freeSlope(v, column []float64, element, k int) {
	if k < 0 || (!c.equal && k < element) {
		clear(v)
		return
	}
	last := element == c.n-1
	share, own := 1.0, 1/c.lag(element)
	if c.equal {
		share = float64(c.n-element) / float64(c.n)
	} else if k > element {
		own = 0
	}
	if last {
		own = 0 // the start of the output itself makes up for it
	}
	for r := range v {
		v[r] = share*v[r] + own*column[r]
	}
}
