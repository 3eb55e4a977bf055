package pages

// depth is half of the stack that a command comes to use.
type depth [60 << 10]byte

// The main stack is widened once, while next to nothing lies on it: grown by doubling, it
// would be copied again and again, each time frame by frame.
func init() { stretch[depth](nil) }

// stretch widens the stack by twice a T, to the next power of two, and leaves it alone: p
// is nil, and the call that takes the room is never made.
//
//go:noinline
func stretch[T any](p *T) {
	if p != nil {
		take(*p)
	}
}

//go:noinline
func take[T any](T) {}
