package data

import (
	"bytes"
	"context"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
)

// Seconds since 1970 are read as such: of a thousand honest logs next to none
// holds nothing but digits of dates.
func TestTenDigitsHonest(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	refused := 0
	for range 1000 {
		start := 1_262_304_000 + r.Int64N(600_000_000) // 2010 to 2029
		step := []int64{1, 2, 5, 10, 30, 60, 100, 300}[r.IntN(8)]
		var b strings.Builder
		b.WriteString("time,drive_V,outlet_degC\n")
		for i := range int64(60) {
			fmt.Fprintf(&b, "%d,%d,24.%d\n", start+i*step, i/30, i%7)
		}
		runs, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader([]byte(b.String()))})
		if err != nil {
			refused++
		} else if runs[0].Start.Unix() != start {
			t.Fatalf("start %v, want %d", runs[0].Start, start)
		}
	}
	if refused > 2 {
		t.Errorf("%d of 1000 logs refused", refused)
	}
}
