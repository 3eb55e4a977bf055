package fit

import (
	"fmt"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// BenchmarkEval is one evaluation of a plant on the averaged rows of a bump
// test, alone and with all that a descent needs.
func BenchmarkEval(b *testing.B) {
	l := twoLags()
	l.every *= float64(l.n) / 1000
	l.n = 1000
	run := l.run(1)
	for _, name := range []string{"fopdt", "chain2", "chain3", "chain4", "equal5"} {
		for _, full := range []bool{false, true} {
			o, _ := Options{}.withDefaults()
			recs, err := prepare([]*data.Run{run}, o.Law)
			if err != nil {
				b.Fatal(err)
			}
			r := recs[0].focus(0.3, 3*recs[0].step)
			r.model(rest, true)
			r.setShape(shape{tc: 0.3, white: 0.1})
			st, _ := ident.ParseStructure(name)
			e := newEngine(st, []*record{r})
			eta := append([]float64{2, 0.7, 0.3, 0.1}[:st.NumLags():st.NumLags()], 0.3)
			b.Run(fmt.Sprintf("%s/full=%v", name, full), func(b *testing.B) {
				b.ReportAllocs()
				for b.Loop() {
					e.eval(eta, full)
				}
				b.ReportMetric(b.Elapsed().Seconds()*1e9/float64(b.N)/float64(len(r.t)), "ns/row")
				b.ReportMetric(float64(len(r.t)), "rows")
			})
		}
	}
}
