package report

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

func sampleFigures() []*Figure {
	b := sampleBundle()
	m, l, g := b.model(), b.Loop, b.Gains
	return []*Figure{
		LogFigure(b.Runs[0], b.Curves[0], m), ResidualFigure(b.Runs[0], b.Curves[0], m),
		IntervalFigure(m, b.Card.Profiles, 0.95), StepFigure(l.Step, g), LoadFigure(l.Load, g), SensitivityFigure(l.Sensitivity, g),
		PoleFigure(l.Poles), ReplayFigure(&b.Replay.Runs[0], g, g.Requirement), DriftFigure(b.Drift),
	}
}

func written(t *testing.T, f *Figure, name string) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := f.Write(&b, name); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestFiguresInEveryFormat(t *testing.T) {
	keep := os.Getenv("LAGWRIGHT_KEEP_FIGURES")
	for _, f := range sampleFigures() {
		if f.Finding == "" || f.Alt == "" || f.Name == "" {
			t.Errorf("%q: no name or words", f.Name)
		}
		for _, ext := range []string{".svg", ".png", ".pdf"} {
			first := written(t, f, f.Name+ext)
			if keep != "" {
				if err := os.WriteFile(filepath.Join(keep, f.Name+ext), first, 0o666); err != nil {
					t.Fatal(err)
				}
			}
			if !bytes.Equal(first, written(t, f, f.Name+ext)) {
				t.Errorf("%s%s: two drawings differ", f.Name, ext)
			}
			switch ext {
			case ".svg":
				checkXML(t, f.Name, first)
			case ".png":
				img, err := png.Decode(bytes.NewReader(first))
				if err != nil {
					t.Fatal(err)
				}
				if w := img.Bounds().Dx(); w != (wideWidth+2*border)*pngDPI/72 {
					t.Errorf("%s: %d pixels wide", f.Name, w)
				}
			case ".pdf":
				if !bytes.HasPrefix(first, []byte("%PDF-")) {
					t.Errorf("%s: no PDF", f.Name)
				}
			}
		}
	}
}

// TestFiguresSayWhatTheyMust: requirement, limits, bumps and clock are drawn
// in, with their words.
func TestFiguresSayWhatTheyMust(t *testing.T) {
	want := map[string][]string{
		"log":           {"Temperature, °C", "Input, V", "bump 1", "bump 2", "fitted", "band of the model", "Clock time, 2026-03-04 (UTC+01:00)", "08:14"},
		"residuals":     {"Log minus model, K", "expected of noise, ±0.05", "Lag, samples"},
		"intervals":     {"Gain: 12.41 ± 0.13 K/V", "Lag 2: 5.9 s (4.4 to 8.1)", "Dead time, s", "limit"},
		"step-response": {"Temperature rise, K", "Input change, V", "settled by 60 s", "8 % overshoot", "plausible plants", "Time after the step, s"},
		"load-response": {"Temperature deviation, K", "Input change, V"},
		"sensitivity":   {"Sensitivity |S|", "Ms limit 1.7", "Frequency, rad/s"},
		"poles":         {"required region", "stable to the left", "Real part, 1/s", "Poles: imaginary part, rad/s"},
		"replay":        {"proposed, median", "proposed, plausible plants", "setpoint", "logged"},
		"drift":         {"Gain, K/V", "Lag 1, s", "changed", "limits", "Date, from 2026-01-07"},
	}
	for _, f := range sampleFigures() {
		svg := string(written(t, f, f.Name+".svg"))
		for _, w := range want[f.Name] {
			if !strings.Contains(svg, ">"+w+"</text>") {
				t.Errorf("%s: %q is not in the drawing", f.Name, w)
			}
		}
		delete(want, f.Name)
	}
	for name := range want {
		t.Errorf("no figure %s", name)
	}
}

func checkXML(t *testing.T, name string, svg []byte) {
	t.Helper()
	d := xml.NewDecoder(bytes.NewReader(svg))
	for {
		_, err := d.Token()
		if err == io.EOF {
			return
		}
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
	}
}

func TestFigureUnknownEnding(t *testing.T) {
	err := sampleFigures()[0].Write(io.Discard, "log.gif")
	if err == nil || !strings.Contains(err.Error(), ".svg, .png or .pdf") {
		t.Errorf("error %v does not say what to do", err)
	}
}

func TestWindows1252(t *testing.T) {
	if got := windows1252("5 °C ± µ τ"); got != "5 \xb0C \xb1 \xb5 ?" {
		t.Errorf("recoded as %q", got)
	}
}

// TestFiguresOfPoorData: empty, constant, short and broken series are drawn
// without a panic and without NaN.
func TestFiguresOfPoorData(t *testing.T) {
	nan := math.NaN()
	for name, y := range map[string][]float64{
		"nothing": {}, "one": {20}, "constant": {20, 20, 20}, "missing": {nan, nan, nan}, "alone": {nan, 21, nan}, "huge": {-1e300, 1e300, 0},
	} {
		r := &data.Run{Units: data.Units{Input: "V", Temperature: "degC"}}
		for i := range y {
			r.T, r.U = append(r.T, float64(i)), append(r.U, 3)
		}
		r.Y = y
		for _, ext := range []string{".svg", ".png"} {
			if out := written(t, LogFigure(r, nil, nil), "x"+ext); ext == ".svg" && strings.Contains(string(out), "NaN") {
				t.Errorf("%s: NaN in the drawing", name)
			}
		}
	}
}

// TestSpikeSurvives: the highest sample of a long log reaches the top of the
// drawing.
func TestSpikeSurvives(t *testing.T) {
	n := 100000
	x, y := make([]float64, n), make([]float64, n)
	for i := range x {
		x[i] = float64(i)
	}
	y[61803] = 1
	f := &Figure{panels: []*panel{{x: elapsed("Time", x[n-1]), y: axis{label: "y"}, height: 100, marks: []mark{trace{name: "spike", x: x, y: y, ink: inkModel}}}}}
	svg := f.inline(wideWidth).body.String()
	top, _, _ := strings.Cut(svg[strings.Index(svg, `data-box="`)+len(`data-box="`):], `"`)
	want := strings.Fields(top)[1] // y of the pane's upper edge
	path := svg[strings.Index(svg, `data-name="spike"`):]
	if !strings.Contains(path[:strings.Index(path, "/>")], ","+want) {
		t.Error("the spike is not drawn")
	}
	if len(svg) > 60000 {
		t.Errorf("%d bytes for one thinned line", len(svg))
	}
}

func BenchmarkPage(b *testing.B) {
	bundle := sampleBundle()
	for b.Loop() {
		if err := Page(io.Discard, bundle); err != nil {
			b.Fatal(err)
		}
	}
}

// TestSideLabelsApart: labels of upright lines that stand close do not run into
// each other; the first is written, and all where there is room.
func TestSideLabelsApart(t *testing.T) {
	b := sampleBundle()
	r, c := b.Runs[0], b.Curves[0]
	last := r.T[len(r.T)-1]
	for _, tt := range []struct {
		bumps []float64 // shares of the log
		want  []string
	}{
		{[]float64{0.1, 0.5}, []string{"bump 1", "bump 2"}},
		{[]float64{0.1, 0.11, 0.5}, []string{"bump 1", "bump 3"}},
		{[]float64{0.1, 0.999}, []string{"bump 1", "bump 2"}},
	} {
		curves := *c
		curves.Bumps = nil
		for _, share := range tt.bumps {
			curves.Bumps = append(curves.Bumps, ident.Bump{Time: share * last, From: 3, To: 4})
		}
		svg := string(drawingOf(LogFigure(r, &curves, b.model()), narrowWidth).Body)
		var got []string
		for i := range tt.bumps {
			if label := fmt.Sprintf("bump %d", i+1); strings.Contains(svg, ">"+label+"<") {
				got = append(got, label)
			}
		}
		if !slices.Equal(got, tt.want) {
			t.Errorf("bumps at %v: %q, want %q", tt.bumps, got, tt.want)
		}
	}
}
