package tune

import (
	"math"
	"math/rand/v2"
	"testing"
)

// A double integrator-like check by hand: two lags without dead time. The
// poles of (10s+1)(2s+1) + 2·Kc are −0.3 ± √(0.09 − (1+2·Kc)/20): real up to
// Kc = 0.4, where they meet at −0.3; there the damping ratio starts to fall,
// 0.3/√((1+2·Kc)/20).
func TestRegionOfTwoLags(t *testing.T) {
	p := plant(t, "chain2", 2, []float64{10, 2}, 0)
	points, err := BreakawayPoints(p, newGains(pLaw(1), "p"))
	if err != nil {
		t.Fatal(err)
	}
	if len(points) != 1 {
		t.Fatalf("breakaway points %v, want one", points)
	}
	near(t, "breakaway pole", points[0].Pole, -0.3, 1e-9)
	near(t, "breakaway gain", points[0].Kc, 0.4, 1e-9)

	d := DesignPoleRegion(p, nil, PoleRegion{Settling: -math.Log(0.02) / 0.2, Damping: 0.5}, 0.95)
	if len(d.Nominal) != 1 {
		t.Fatalf("gains %v, want one interval", d.Nominal)
	}
	// Re = −0.2 while real: 0.09 − (1+2Kc)/20 = 0.01; damping 0.5: (1+2Kc)/20 = 0.36
	near(t, "low", d.Nominal[0].Low, 0.3, 1e-9)
	near(t, "high", d.Nominal[0].High, 3.1, 1e-9)

	d = DesignPoleRegion(p, nil, PoleRegion{Settling: -math.Log(0.02) / 0.31}, 0.95)
	if len(d.Nominal) != 0 {
		t.Errorf("gains %v for a real part no gain reaches", d.Nominal)
	}
	near(t, "best settling", d.BestSettling, -math.Log(0.02)/0.3, 1e-4)
}

// A first-order plant with dead time breaks away at −1/tau − 1/theta with
// K·Kc = (tau/theta)·e^(−1 − theta/tau) (derived: D' + theta·D = 0).
func TestBreakawayWithDeadTime(t *testing.T) {
	p := plant(t, "fopdt", -3, []float64{10}, 4)
	points, err := BreakawayPoints(p, newGains(pLaw(-1), "p"))
	if err != nil {
		t.Fatal(err)
	}
	if len(points) != 1 {
		t.Fatalf("breakaway points %v, want one", points)
	}
	near(t, "pole", points[0].Pole, -0.1-0.25, 1e-12)
	near(t, "gain", points[0].Kc, -(10.0/4)*math.Exp(-1-0.4)/3, 1e-12)
	// the two poles of the locus meet there
	locus, err := RootLocus(p, newGains(pLaw(-1), "p"), []float64{points[0].Kc * 0.999999, points[0].Kc * 1.000001})
	if err != nil {
		t.Fatal(err)
	}
	if imag(locus[0].Poles[0]) != 0 || imag(locus[1].Poles[0]) == 0 {
		t.Errorf("poles %v below and %v above the breakaway gain", locus[0].Poles[:2], locus[1].Poles[:2])
	}
}

// The set of gains against the poles themselves, gain by gain.
func TestRegionAgainstPoles(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 4))
	inside, outside := 0, 0
	for seed := range uint64(25) {
		p := family(t, seed, 1, 0)[0]
		ku, pu, err := quickUltimate(p)
		if err != nil {
			t.Fatal(err)
		}
		r := PoleRegion{Settling: pu * math.Exp(2.2*rng.Float64()), Damping: 0.2 + 0.6*rng.Float64()}
		if seed%5 == 0 {
			r.Settling = 0
		}
		if seed%5 == 1 {
			r.Damping = 0
		}
		set := regionGains(p, r)
		for i := range 60 {
			kc := ku * math.Pow(0.002, float64(i)/60) * 0.999
			in, edge := false, false
			for _, g := range set {
				in = in || kc > g.Low && kc < g.High
				edge = edge || math.Abs(kc-g.Low) < 0.01*kc || math.Abs(kc-g.High) < 0.01*kc
			}
			l := newOpenLoop(p, pLaw(kc), 0)
			poles := l.poles()
			want := -real(poles[0]) > r.sigma() && dominantDamping(poles, l.phaseCross()) > r.Damping
			if in != want && !edge {
				t.Errorf("%v, region %+v, kc %.5g: in the set %v, by its poles %v (%v)", p, r, kc, in, want, poles[:min(4, len(poles))])
			}
			if want {
				inside++
			} else {
				outside++
			}
		}
	}
	if inside < 100 || outside < 100 {
		t.Errorf("%d gains inside, %d outside: too one-sided a test", inside, outside)
	}
}

// The plausible set is what a share of the plants have in common.
func TestSharedGains(t *testing.T) {
	sets := [][]GainInterval{{{1, 4}}, {{2, 5}}, {{3, 6}, {8, 9}}, nil}
	got, most := sharedGains(sets, 0.5)
	if len(got) != 1 || got[0] != (GainInterval{2, 5}) {
		t.Errorf("half of the plants share %v, want 2 to 5", got)
	}
	near(t, "largest share", most, 0.75, 0)
	if got, _ = sharedGains(sets, 1); len(got) != 0 {
		t.Errorf("all share %v, want none", got)
	}
}
