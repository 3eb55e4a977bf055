package pages

import "unsafe"

// populate is MADV_POPULATE_READ, which systems older than Linux 5.14 refuse.
const populate = 22

func init() {
	if from, to := code(); from < to {
		advise(from, to-from, populate)
	}
}

// code is where the program's instructions lie: of the pieces of memory that the system
// lists, the one this function is in. Nothing, where it is not among the first ones.
func code() (from, to uintptr) {
	f := code
	here := **(**uintptr)(unsafe.Pointer(&f))
	var list [4096]byte
	rest := list[:readFile("/proc/self/maps", list[:])]
	for len(rest) > 0 {
		from, rest = hexadecimal(rest)
		if len(rest) > 0 {
			to, rest = hexadecimal(rest[1:])
		}
		if from <= here && here < to {
			return from, to
		}
		for len(rest) > 0 && rest[0] != '\n' {
			rest = rest[1:]
		}
		if len(rest) > 0 {
			rest = rest[1:]
		}
	}
	return 0, 0
}

// hexadecimal is the number that a text begins with, and what follows it.
func hexadecimal(text []byte) (v uintptr, rest []byte) {
	for i, c := range text {
		switch {
		case '0' <= c && c <= '9':
			v = v<<4 | uintptr(c-'0')
		case 'a' <= c && c <= 'f':
			v = v<<4 | uintptr(c-'a'+10)
		default:
			return v, text[i:]
		}
	}
	return v, nil
}
