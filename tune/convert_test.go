package tune

import (
	"bytes"
	"errors"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"lagwright/data"
)

func ptr(x float64) *float64 { return &x }

// Every spelling of a controller is the same controller: the same C(s), the
// same path from the setpoint, and back to the same numbers.
func TestConvertIsExact(t *testing.T) {
	spans := Spelling{InputSpan: &data.Span{Low: 2, High: 10}, TempSpan: &data.Span{Low: 0, High: 250}}
	percent := spans
	percent.Band, percent.Rate, percent.Minutes = true, true, true
	for _, g := range []*Gains{
		newGains(law{kc: 0.4, ti: 50, td: 8, tf: 1.5, b: 0.7}, "pid"),
		newGains(law{kc: -0.4, ti: 50, td: 12.5, b: 1}, "pid"),
		newGains(piLaw(2, 30), "pi"),
		newGains(pLaw(3), "p"),
	} {
		g.Bias = 4
		if g.Ti != nil {
			g.Bias = 0
		}
		want, err := g.law()
		if err != nil {
			t.Fatal(err)
		}
		for _, form := range []string{Ideal, Parallel, Series} {
			for _, s := range []Spelling{{}, {Minutes: true, Rate: true}, spans, percent} {
				if form == Parallel && s.Band {
					if _, err := Convert(g, form, s); err == nil {
						t.Error("parallel form with a proportional band: no error")
					}
					continue
				}
				c, err := Convert(g, form, s)
				if err != nil {
					t.Fatal(err)
				}
				got, err := c.law()
				if err != nil {
					t.Fatal(err)
				}
				sameLaw(t, form, got, want)
				back, err := FromEntries(c.Entry, form, c.Action, c.Units, s)
				if err != nil {
					t.Fatal(err)
				}
				if got, err = back.law(); err != nil {
					t.Fatal(err)
				}
				sameLaw(t, form+" entered", got, want)
				near(t, "bias", back.Bias, g.Bias, 1e-12)
			}
		}
	}
}

// sameLaw compares what the loop and the setpoint see.
func sameLaw(t *testing.T, name string, got, want law) {
	t.Helper()
	path := func(c law, w float64) (loop, setpoint complex128) {
		s := complex(0, w)
		integral := complex(0, 0)
		if c.integral() {
			integral = 1 / (s * complex(c.ti, 0))
		}
		loop = complex(c.kc, 0) * (1 + integral + s*complex(c.td, 0)) / (1 + s*complex(c.tf, 0))
		return loop, complex(c.kc, 0) * (complex(c.b, 0) + integral)
	}
	for _, w := range []float64{0.001, 0.1, 1, 50} {
		a, b := path(got, w)
		c, d := path(want, w)
		if cmplx.Abs(a-c) > 1e-12*cmplx.Abs(c) || cmplx.Abs(b-d) > 1e-12*cmplx.Abs(d) {
			t.Errorf("%s: at %g rad/s C is %v and %v, want %v and %v", name, w, a, b, c, d)
		}
	}
}

// Series C(s) really is the product its name says.
func TestSeriesForm(t *testing.T) {
	c, err := toIdeal(pidLaw(2, 10, 3), Series)
	if err != nil {
		t.Fatal(err)
	}
	s := complex(0.02, 0.3)
	product := 2 * (1 + 1/(10*s)) * (1 + 3*s)
	ideal := complex(c.kc, 0) * (1 + 1/(complex(c.ti, 0)*s) + complex(c.td, 0)*s)
	if cmplx.Abs(product-ideal) > 1e-14*cmplx.Abs(product) {
		t.Errorf("series %v, ideal %v", product, ideal)
	}
}

// A filter on the derivative alone can do the same as one in front of it all.
func TestDerivativeOnlyFilter(t *testing.T) {
	c := law{kc: 0.8, ti: 40, td: 9, tf: 0.9, b: 0.5}
	d, ok := derivativeOnly(c)
	if !ok {
		t.Fatal("no such settings")
	}
	near(t, "setpoint gain", d.kc*d.b, c.kc*c.b, 1e-14)
	for _, w := range []float64{0.01, 0.3, 5} {
		s := complex(0, w)
		alone := complex(d.kc, 0) * (1 + 1/(complex(d.ti, 0)*s) + complex(d.td, 0)*s/(complex(d.tf, 0)*s+1))
		if cmplx.Abs(alone-c.response(w)) > 1e-13*cmplx.Abs(alone) {
			t.Errorf("at %g rad/s %v, want %v", w, alone, c.response(w))
		}
	}
	if _, ok := derivativeOnly(piLaw(1, 10)); ok {
		t.Error("settings without a filter")
	}
}

func TestConvertNamesTheNearest(t *testing.T) {
	g := newGains(pidLaw(1, 10, 3), "pid")
	_, err := Convert(g, Series, Spelling{})
	var none *NoSeriesError
	if !errors.As(err, &none) {
		t.Fatalf("error %v, want a NoSeriesError", err)
	}
	if !strings.Contains(err.Error(), "td_s 2.5") {
		t.Errorf("error %q does not name the nearest td_s", err)
	}
	*g.Td = none.Ti / 4
	if _, err := Convert(g, Series, Spelling{}); err != nil {
		t.Errorf("the nearest has no series form either: %v", err)
	}
	if _, err := Convert(g, Ideal, Spelling{Band: true}); err == nil {
		t.Error("proportional band without spans: no error")
	}
	if _, err := Convert(g, Ideal, Spelling{InputSpan: &data.Span{High: 10}}); err == nil {
		t.Error("one span only: no error")
	}
	if _, err := Convert(g, "standard", Spelling{}); err == nil {
		t.Error("unknown form: no error")
	}
}

// A worked spelling: 0.4 V/K on 0..10 V and 0..200 °C is 8 %/%, a
// proportional band of 12.5 %; 30 s are 2 repeats per minute.
func TestSpelling(t *testing.T) {
	g := newGains(pidLaw(0.4, 30, 6), "pid")
	c, err := Convert(g, Ideal, Spelling{Band: true, Rate: true, Minutes: true,
		InputSpan: &data.Span{High: 10}, TempSpan: &data.Span{High: 200, Unit: "C"}})
	if err != nil {
		t.Fatal(err)
	}
	want := []Entry{{"proportional band", 12.5, "% of 0 to 200 degC"}, {"integral rate", 2, "repeats/min"}, {"derivative time", 0.1, "min"}, {"setpoint weight", 1, ""}}
	for i, e := range want {
		if c.Entry[i].Name != e.Name || c.Entry[i].Unit != e.Unit || math.Abs(c.Entry[i].Value-e.Value) > 1e-12 {
			t.Errorf("entry %d is %v, want %v", i, c.Entry[i], e)
		}
	}
	if c, err = Convert(g, Parallel, Spelling{}); err != nil {
		t.Fatal(err)
	}
	near(t, "Ki", c.Entry[1].Value, 0.4/30, 1e-15)
	near(t, "Kd", c.Entry[2].Value, 2.4, 1e-15)
}

func TestGainsFileRoundTrip(t *testing.T) {
	g := newGains(law{kc: -0.4, ti: 50, td: 8, tf: 1.5, b: 0.7}, "pid")
	g.Limits = Limits{Min: ptr(0), Max: ptr(10)}
	var first, second bytes.Buffer
	if err := g.WriteJSON(&first); err != nil {
		t.Fatal(err)
	}
	text := first.String()
	back, err := ReadGains(&first, "gains.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := back.WriteJSON(&second); err != nil {
		t.Fatal(err)
	}
	if second.String() != text {
		t.Errorf("written again it differs:\n%s\n%s", text, second.String())
	}
	for _, c := range []struct{ from, to, says string }{
		{`lagwright/gains/1`, `lagwright/gains/2`, `"lagwright/gains/2"`},
		{`"kc": -0.4`, `"kc": 0`, "kc is 0"},
		{`"ti_s": 50`, `"ti_s": -1`, "ti_s is -1"},
		{`"controller": "pid"`, `"controller": "pi"`, "those of pid"},
		{`"action": "direct"`, `"action": "reverse"`, "action is"},
		{`"max": 10`, `"max": -3`, "not below max"},
		{`"form": "ideal"`, `"form": "strange"`, "form"},
		{`{`, `[`, "not a gains file"},
	} {
		_, err := ReadGains(strings.NewReader(strings.Replace(text, c.from, c.to, 1)), "gains.json")
		if err == nil || !strings.Contains(err.Error(), c.says) || !strings.HasPrefix(err.Error(), "gains.json: ") {
			t.Errorf("%s for %s: error %v, want one that says %q", c.to, c.from, err, c.says)
		}
	}
}

func FuzzReadGains(f *testing.F) {
	var b bytes.Buffer
	if err := newGains(pidLaw(1, 10, 1), "pid").WriteJSON(&b); err != nil {
		f.Fatal(err)
	}
	f.Add(b.Bytes())
	f.Add([]byte(`{"schema":"lagwright/gains/1","kc":1e308,"ti_s":1e-308}`))
	f.Fuzz(func(t *testing.T, raw []byte) {
		g, err := ReadGains(bytes.NewReader(raw), "x")
		if err != nil {
			return
		}
		var out bytes.Buffer
		if err := g.WriteJSON(&out); err != nil {
			t.Fatalf("what was read cannot be written: %v", err)
		}
		if _, err := ReadGains(&out, "x"); err != nil {
			t.Fatalf("what was written cannot be read: %v", err)
		}
	})
}

// A proportional band means nothing without the spans, and spans in other
// units than the gains would give a wrong one.
func TestBandNeedsFittingSpans(t *testing.T) {
	g := &Gains{Controller: "pi", Form: Ideal, Kc: 0.5, Ti: finite(30), Action: "reverse", SetpointWeight: 1, Units: GainUnits{Input: "%", Temperature: "degC"}}
	volts, celsius := &data.Span{Low: 0, High: 10, Unit: "V"}, &data.Span{Low: 0, High: 200, Unit: "C"}
	if _, err := Convert(g, Ideal, Spelling{Band: true}); err == nil {
		t.Error("a band without spans is told")
	}
	if _, err := Convert(g, Ideal, Spelling{Band: true, InputSpan: volts, TempSpan: celsius}); err == nil {
		t.Error("a span in V is taken for gains in %")
	}
	percent := func(s *data.Span) float64 {
		c, err := Convert(g, Ideal, Spelling{Band: true, TempSpan: s})
		if err != nil {
			t.Fatal(err)
		}
		return c.Entry[0].Value
	}
	// The same instrument in Fahrenheit: 0 to 200 °C is 32 to 392 °F.
	if c, f := percent(celsius), percent(&data.Span{Low: 32, High: 392, Unit: "F"}); c != f {
		t.Errorf("band of 0..200C %g %%, of 32..392F %g %%", c, f)
	}
}

// A P controller has a bias; an input in percent needs no span for it.
func TestBiasInPercent(t *testing.T) {
	g := &Gains{Controller: "p", Form: Ideal, Kc: 0.5, Bias: 40, Action: "reverse", SetpointWeight: 1, Units: GainUnits{Input: "%", Temperature: "degC"}}
	for _, s := range []Spelling{{}, {TempSpan: &data.Span{High: 200, Unit: "C"}}} {
		out, err := Convert(g, Ideal, s)
		if err != nil {
			t.Fatal(err)
		}
		if last := out.Entry[len(out.Entry)-1]; last != (Entry{"bias", 40, "%"}) {
			t.Errorf("spelling %+v: %v", s, last)
		}
	}
}
