package fit

import (
	"context"
	"fmt"
	"testing"

	"lagwright/data"
)

// BenchmarkFit is the default fit: every structure, correlated noise, profile
// intervals, 200 plausible plants. The same bump test is logged ever faster.
func BenchmarkFit(b *testing.B) {
	for _, rows := range []int{1e3, 1e5} {
		l := twoLags()
		l.every *= float64(l.n) / float64(rows)
		l.n = rows
		run := l.run(1)
		b.Run(fmt.Sprintf("rows=%d", rows), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Fit(context.Background(), []*data.Run{run}, Options{}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(b.Elapsed().Seconds()*1e9/float64(b.N)/float64(rows), "ns/row")
		})
	}
}
