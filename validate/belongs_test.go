package validate

import (
	"strings"
	"testing"

	"lagwright/fit"
	"lagwright/tune"
)

// A replay belongs to its card and to its gains in any form, to no others.
func TestBelongs(t *testing.T) {
	plant := mustPlant(t, "chain2", 8, []float64{6, 2}, 1.3)
	card, other := cardOf(t, "linear", fit.Noise{SD: 0.1}, plant), cardOf(t, "linear", fit.Noise{SD: 0.2}, plant)
	gains := piGains(0.3, 7, 0.5)
	parallel, err := tune.Convert(gains, tune.Parallel, tune.Spelling{})
	if err != nil {
		t.Fatal(err)
	}
	id, err := card.Fingerprint()
	if err != nil {
		t.Fatal(err)
	}
	r := &Replay{Card: id, Gains: *gains}
	pid := piGains(0.3, 7, 0.5)
	pid.Td = ptr(1)
	for _, c := range []struct {
		name  string
		card  *fit.Card
		gains *tune.Gains
		want  string
	}{
		{"both", card, gains, ""},
		{"nothing to compare", nil, nil, ""},
		{"the same in another form", card, parallel, ""},
		{"written out", card, piGains(0.30012, 7, 0.5), ""},
		{"another card", other, gains, "another card"},
		{"another gain", card, piGains(0.31, 7, 0.5), "other gains"},
		{"another scan", card, piGains(0.3, 7, 1), "other gains"},
		{"a derivative more", card, pid, "other gains"},
	} {
		switch err := r.Belongs(c.card, c.gains); {
		case c.want == "" && err != nil:
			t.Errorf("%s: %v", c.name, err)
		case c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)):
			t.Errorf("%s: error %v, want one with %q", c.name, err, c.want)
		}
	}
}
