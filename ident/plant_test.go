package ident

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"
	"strings"
	"testing"
)

func TestStructures(t *testing.T) {
	var names []string
	for _, st := range Structures() {
		names = append(names, fmt.Sprintf("%s:%d:%d:%t:%t", st, st.Order(), st.NumLags(), st.Equal(), st.Integrating()))
		if same := structure(t, st.String()); same != st {
			t.Errorf("%s is parsed as %s", st, same)
		}
	}
	want := "fopdt:1:1:false:false chain2:2:2:false:false chain3:3:3:false:false chain4:4:4:false:false " +
		"equal2:2:1:true:false equal3:3:1:true:false equal4:4:1:true:false equal5:5:1:true:false " +
		"equal6:6:1:true:false equal7:7:1:true:false equal8:8:1:true:false ipdt:0:0:false:true"
	if got := strings.Join(names, " "); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if _, err := ParseStructure("chain5"); err == nil || !strings.Contains(err.Error(), "chain4, equal2") {
		t.Errorf("the error must list the structures: %v", err)
	}
}

func TestNewPlant(t *testing.T) {
	nan := math.NaN()
	p, err := NewPlant(structure(t, "chain3"), -2, []float64{1, 3, 0}, 0.5)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(p.Lags, []float64{3, 1, 0}) || !slices.Equal(p.Elements(), p.Lags) {
		t.Errorf("lags are %v", p.Lags)
	}
	p, err = NewPlant(structure(t, "equal4"), 2, []float64{3}, 0)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(p.Elements(), []float64{3, 3, 3, 3}) {
		t.Errorf("elements are %v", p.Elements())
	}
	for _, c := range []struct {
		structure string
		gain      float64
		lags      []float64
		deadTime  float64
		says      string
	}{
		{"chain2", 1, []float64{1}, 0, "has 2 lags, got 1"},
		{"ipdt", 1, []float64{1}, 0, "has 0 lags, got 1"},
		{"fopdt", 0, []float64{1}, 0, "gain"},
		{"fopdt", nan, []float64{1}, 0, "gain"},
		{"fopdt", 1, []float64{-1}, 0, "lag 1"},
		{"chain2", 1, []float64{1, math.Inf(1)}, 0, "lag 2"},
		{"fopdt", 1, []float64{1}, -1, "dead time"},
		{"fopdt", 1, []float64{1}, nan, "dead time"},
	} {
		_, err := NewPlant(structure(t, c.structure), c.gain, c.lags, c.deadTime)
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%+v: got error %v", c, err)
		}
	}
	if _, err := NewPlant(Structure{}, 1, nil, 0); err == nil {
		t.Error("a plant without a structure is no error")
	}
}

func TestLaw(t *testing.T) {
	for _, l := range []Law{Linear, Power} {
		same, err := ParseLaw(l.String())
		if err != nil || same != l {
			t.Errorf("%s is parsed as %v, %v", l, same, err)
		}
		const u, h = 3.0, 1e-4
		near(t, l.String()+" slope", l.Slope(u), (l.Apply(u+h)-l.Apply(u-h))/(2*h), 1e-9)
	}
	near(t, "power", Power.Apply(-3), 9, 0)
	if _, err := ParseLaw("cubic"); err == nil {
		t.Error("an unknown law is no error")
	}
}

func TestHeldInput(t *testing.T) {
	times := []float64{0, 1, 2, 3, 4}
	in := HeldInput(times, []float64{2, 2, 3, 3, -3}, Linear)
	if in.Before != 2 || !slices.Equal(in.At, []float64{2, 4}) || !slices.Equal(in.Value, []float64{3, -3}) {
		t.Errorf("linear: %+v", in)
	}
	in = HeldInput(times, []float64{2, 2, 3, 3, -3}, Power)
	if in.Before != 4 || !slices.Equal(in.At, []float64{2}) || !slices.Equal(in.Value, []float64{9}) {
		t.Errorf("power: %+v", in)
	}
	if in := HeldInput(nil, nil, Linear); in.At != nil {
		t.Errorf("nothing gives %+v", in)
	}
}

// TestFrequencyResponse compares G(jw) with magnitude and phase written out,
// and with what the simulation does to a sampled sine once it has settled: both
// must be the same plant.
func TestFrequencyResponse(t *testing.T) {
	for _, c := range []struct {
		structure string
		lags      []float64
	}{{"fopdt", []float64{2}}, {"chain3", []float64{2, 0.7, 0.1}}, {"equal4", []float64{0.5}}} {
		p, err := NewPlant(structure(t, c.structure), -3, c.lags, 0.4)
		if err != nil {
			t.Fatal(err)
		}
		for _, w := range []float64{0, 0.01, 0.9, 40} {
			magnitude, phase := 3.0, math.Pi-0.4*w
			for _, tau := range p.Elements() {
				magnitude /= math.Hypot(1, w*tau)
				phase -= math.Atan(w * tau)
			}
			if d := cmplx.Abs(p.Response(w) - cmplx.Rect(magnitude, phase)); d > 1e-14*magnitude {
				t.Errorf("%s at %g rad/s: off by %g", c.structure, w, d)
			}
		}
	}
	p, err := NewPlant(structure(t, "ipdt"), 3, nil, 0.4)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ipdt magnitude", cmplx.Abs(p.Response(2)), 1.5, 1e-15)
	near(t, "ipdt phase", cmplx.Phase(p.Response(2)), -math.Pi/2-0.8, 1e-15)

	// A sine held over 1 ms is the sine times sinc(w·h/2), half a hold late.
	const w, h, rows = 1.7, 0.001, 40_000
	times, u := make([]float64, rows), make([]float64, rows)
	for k := range times {
		times[k] = h * float64(k)
		u[k] = math.Sin(w * times[k])
	}
	st := structure(t, "chain3")
	p, err = NewPlant(st, 1, []float64{2, 0.7, 0.1}, 0.4)
	if err != nil {
		t.Fatal(err)
	}
	y := NewSimulator(times, HeldInput(times, u, Linear)).Response(nil, st, p.Lags, p.DeadTime)
	held := complex(math.Sin(w*h/2)/(w*h/2), 0) * cmplx.Exp(complex(0, -w*h/2)) * p.Response(w)
	for k := rows - 4000; k < rows; k += 100 {
		near(t, "settled sine", y[k], imag(held*cmplx.Exp(complex(0, w*times[k]))), 1e-6)
	}
}
