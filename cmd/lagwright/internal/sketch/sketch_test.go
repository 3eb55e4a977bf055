package sketch

import (
	"math"
	"os"
	"strings"
	"testing"
	"unicode/utf8"
)

func draw(t *testing.T, width int, colour bool, panels ...Panel) string {
	t.Helper()
	var b strings.Builder
	if err := Draw(&b, width, colour, panels...); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func Example() {
	t := []float64{0, 10, 20, 30, 40}
	Draw(os.Stdout, 30, false, Panel{
		Title:  "input, V",
		Height: 2,
		Series: []Series{{T: t, Y: []float64{4, 4, 6, 6, 6}, Hold: true}},
	})
	// Output:
	//           input, V
	//         6           ⡏⠉⠉⠉⠉⠉⠉⠉⠉⠉
	//         4 ⣀⣀⣀⣀⣀⣀⣀⣀⣀⣀⡇
	//           0 s             40 s
}

func TestDraw(t *testing.T) {
	n := 500
	s := Series{T: make([]float64, n), Y: make([]float64, n), Ink: "36"}
	for i := range n {
		s.T[i], s.Y[i] = float64(i), math.Sin(float64(i)/40)
		if i > 200 && i < 250 {
			s.Y[i] = math.NaN()
		}
	}
	text := draw(t, 100, false, Panel{Title: "temperature, °C", Height: 8, Series: []Series{s}})
	if strings.Contains(text, "\x1b") {
		t.Error("escape codes although no colour was asked for")
	}
	lines := strings.Split(strings.TrimRight(text, "\n"), "\n")
	if len(lines) != 10 {
		t.Errorf("%d lines, want title, 8 rows and the time axis", len(lines))
	}
	for _, line := range lines {
		if w := utf8.RuneCountInString(line); w > 100 {
			t.Errorf("%d columns: %s", w, line)
		}
	}
	if coloured := draw(t, 100, true, Panel{Height: 8, Series: []Series{s}}); !strings.Contains(coloured, "\x1b[36m") || !strings.Contains(coloured, "\x1b[m") {
		t.Error("no colour although asked for")
	}
}

func TestDrawNothing(t *testing.T) {
	for name, p := range map[string]Panel{
		"no series":   {Height: 3},
		"no rows":     {Height: 3, Series: []Series{{}}},
		"one row":     {Height: 3, Series: []Series{{T: []float64{1}, Y: []float64{1}}}},
		"all missing": {Height: 3, Series: []Series{{T: []float64{0, 1}, Y: []float64{math.NaN(), math.NaN()}}}},
		"constant":    {Height: 3, Series: []Series{{T: []float64{0, 1}, Y: []float64{5, 5}}}},
	} {
		t.Run(name, func(t *testing.T) { draw(t, 80, false, p) })
	}
	if text := draw(t, 12, false, Panel{Height: 3, Series: []Series{{T: []float64{0, 1}, Y: []float64{5, 5}}}}); text != "" {
		t.Errorf("drawn in 12 columns: %q", text)
	}
}
