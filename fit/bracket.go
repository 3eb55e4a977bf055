package fit

// bracket closes in on the root of a rising function between two places on either side
// of it, by regula falsi with the Illinois modification.
type bracket struct {
	lo, hi   float64
	fl, fh   float64 // the function there, halved at an end that stays twice
	replaced int     // the end that the last place took: -1 lo, 1 hi
}

// next is the place to look at.
func (b *bracket) next() float64 { return b.hi - b.fh*(b.hi-b.lo)/(b.fh-b.fl) }

// take puts the place x, where the function is f, in place of an end.
func (b *bracket) take(x, f float64) {
	if f > 0 {
		b.hi, b.fh = x, f
		if b.replaced == 1 {
			b.fl /= 2
		}
		b.replaced = 1
		return
	}
	b.lo, b.fl = x, f
	if b.replaced == -1 {
		b.fh /= 2
	}
	b.replaced = -1
}

// middle is halfway.
func (b *bracket) middle() float64 { return (b.lo + b.hi) / 2 }
