package data

import (
	"strings"
	"testing"
)

func TestMonthByName(t *testing.T) {
	for name, want := range map[string]int{
		"Mar": 3, "mar": 3, "März": 3, "Mrz": 3, "mars": 3, "marts": 3, "mart": 3, "marzo": 3, "maaliskuuta": 3, "марта": 3, "marca": 3,
		"marraskuuta": 11, "marras": 11, "listopada": 11, "lis": 11, "Kas": 11, "нояб": 11,
		"juin": 6, "juil": 7, "jui": 0, "červen": 6, "června": 6, "července": 7, "Jun": 6, "giu": 6, "lug": 7, "lip": 7,
		"janv": 1, "ene": 1, "gen": 1, "Jän": 1, "led": 1, "Sept": 9, "sept": 9, "set": 9, "out": 10, "paź": 10, "ott": 10, "aoû": 8, "ago": 8, "elo": 8,
		"may": 5, "mai": 5, "maj": 5, "mei": 5, "mag": 5, "мая": 5,
		"temp": 0, "marker": 0, "decimal": 0, "junction": 0, "market": 0, "ma": 0, "": 0,
	} {
		if got := monthByName([]byte(name)); got != want {
			t.Errorf("%q is month %d, want %d", name, got, want)
		}
	}
}

// Every name is that of its own month in its own language, but for the
// beginnings that several languages share.
func TestMonthNamesInFull(t *testing.T) {
	for _, language := range monthNames {
		for m, forms := range language {
			for _, name := range strings.Fields(forms) {
				if got := monthByName([]byte(name)); got != m+1 {
					t.Errorf("%q is month %d, want %d", name, got, m+1)
				}
			}
		}
	}
}
