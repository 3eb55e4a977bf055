package report

import (
	"math"
	"strings"
	"testing"
)

// contrast is the contrast ratio of two colours by WCAG 2.2: (L1 + 0.05)/(L2 +
// 0.05) of their relative luminances.
func contrast(a, b uint32) float64 {
	la, lb := luminance(a), luminance(b)
	return (math.Max(la, lb) + 0.05) / (math.Min(la, lb) + 0.05)
}

func luminance(c uint32) float64 {
	linear := func(shift uint) float64 {
		v := float64(c>>shift&0xff) / 255
		if v <= 0.04045 {
			return v / 12.92
		}
		return math.Pow((v+0.055)/1.055, 2.4)
	}
	return 0.2126*linear(16) + 0.7152*linear(8) + 0.0722*linear(0)
}

func TestContrastOfKnownPairs(t *testing.T) {
	// WCAG 2.2, definition of contrast ratio: white on black is 21:1.
	if got := contrast(0xffffff, 0x000000); math.Abs(got-21) > 1e-9 {
		t.Errorf("white on black %g, want 21", got)
	}
	// #777 on white is 4.48, just short of AA (from memory).
	if got := contrast(0x777777, 0xffffff); math.Abs(got-4.48) > 0.01 {
		t.Errorf("#777 on white %g, want 4.48", got)
	}
}

func TestPaletteContrast(t *testing.T) {
	texts := map[string]bool{"text": true, "muted": true, "limit": true, "good": true, "bad": true, "model": true, "other": true}
	for _, k := range palette {
		if k.role == "paper" || k.role == "grid" {
			continue
		}
		want := 3.0
		if texts[k.role] {
			want = 4.5
		}
		if got := contrast(k.light, inkPaper.light); got < want {
			t.Errorf("%s on a light page: %.2f, want %.1f", k.role, got, want)
		}
		if got := contrast(k.dark, inkPaper.dark); got < want {
			t.Errorf("%s on a dark page: %.2f, want %.1f", k.role, got, want)
		}
	}
}

func TestPaletteCSSNamesEveryInk(t *testing.T) {
	css := paletteCSS(":root") + inkCSS()
	for _, k := range palette {
		for _, part := range []string{"--" + k.role + ":#", ".s-" + k.role + "{", ".f-" + k.role + "{"} {
			if !strings.Contains(css, part) {
				t.Errorf("no %q in the style", part)
			}
		}
	}
}
