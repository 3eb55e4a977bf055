package report

import "testing"

func TestSentenceCase(t *testing.T) {
	for in, want := range map[string]string{
		"the clock jumps": "The clock jumps", "bump.csv: no zone": "bump.csv: no zone", "élan": "Élan", "": "", "3 gaps": "3 gaps", "settling: late": "Settling: late",
	} {
		if got := sentenceCase(in); got != want {
			t.Errorf("sentenceCase(%q) = %q, want %q", in, got, want)
		}
	}
	for in, want := range map[string]string{"dead_time": "Dead time", "lag2": "Lag 2", "gain": "Gain", "lags": "Lags", "sum_of_lags": "Sum of lags"} {
		if got := parameterName(in); got != want {
			t.Errorf("parameterName(%q) = %q, want %q", in, got, want)
		}
	}
}
