package fit

import (
	"context"
	"testing"
	"time"

	"lagwright/data"
	"lagwright/ident"
)

func TestTrialReal(t *testing.T) {
	for _, c := range []struct{ file, st, in, dr string; sse float64 }{
		{"air_heater_bench.csv", "fopdt", "earlier", "none", 14.830271240486853},
		{"air_heater_bench.csv", "chain2", "earlier", "none", 8.72980935281834},
		{"air_heater_bench.csv", "chain3", "earlier", "none", 8.656579767590975},
		{"air_heater_bench.csv", "fopdt", "rest", "none", 25.83735412276275},
		{"air_heater_bench.csv", "chain2", "rest", "none", 18.597485125020174},
		{"small_heater_levels.csv", "fopdt", "rest", "none", 15.466952030286402},
		{"small_heater_levels.csv", "chain2", "rest", "none", 7.224272980399247},
		{"small_heater_doublet.csv", "fopdt", "rest", "none", 82.96420529688773},
		{"small_heater_doublet.csv", "chain2", "rest", "none", 55.80689735594933},
		{"air_heater_bench.csv", "equal2", "earlier", "none", 8.814038586863013},
		{"air_heater_bench.csv", "equal3", "earlier", "none", 9.918747144984025},
		{"air_heater_bench.csv", "equal4", "earlier", "none", 11.276117922613796},
		{"air_heater_bench.csv", "chain2", "earlier", "linear", 5.55710659243979},
	} {
		runs, err := data.Read(context.Background(), "../../shared/data/"+c.file, data.Options{TimeCol: "t_s", InputCol: "u", TempCol: "y"})
		if err != nil {
			t.Fatal(err)
		}
		o, err := Options{Structure: c.st, Initial: c.in, Drift: c.dr, Noise: "white"}.withDefaults()
		if err != nil {
			t.Fatal(err)
		}
		recs, err := prepare(runs, ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		start := time.Now()
		out, err := find(context.Background(), recs, o)
		if err != nil {
			t.Fatal(err)
		}
		m := out.models[0]
		t.Logf("%-26s %-7s %-8s %-7s sse/ref-1 %.2e  gain %.6g eta %.6g groups %v", c.file, c.st, c.in, c.dr, m.p.s/c.sse-1, m.p.gain, m.p.eta, m.groups)
		for _, e := range m.est {
			t.Logf("    %.6g se %.3g [%.6g, %.6g]", e.value, e.se, e.low, e.high)
		}
		t.Log(time.Since(start))
	}
}
