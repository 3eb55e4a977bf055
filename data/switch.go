package data

import (
	"bytes"
	"fmt"
	"slices"
	"strings"
)

// onWords and offWords are what loggers write for a drive that can only be
// switched. A closed contact lets current through, so CLOSED is on. HIGH and
// LOW are none of them: low may be a stage of its own.
var (
	onWords = []string{"ON", "TRUE", "CLOSED", "RUN", "RUNNING", "ENERGIZED", "YES", "EIN", "AN", "JA", "WAHR", "MARCHE", "OUI", "VRAI",
		"ENCENDIDO", "SÍ", "SI", "VERDADERO", "ACCESO", "VERO", "AAN", "WAAR", "LIGADO", "SIM", "VERDADEIRO", "PÅ", "TIL",
		"ZAŁ", "ZAŁ.", "ZAP", "ZAPNUTO", "PÄÄLLÄ", "AÇIK", "オン", "开", "開"}
	offWords = []string{"OFF", "FALSE", "OPEN", "STOP", "STOPPED", "DEENERGIZED", "DE-ENERGIZED", "NO", "AUS", "NEIN", "FALSCH", "ARRET", "ARRÊT", "NON", "FAUX",
		"APAGADO", "FALSO", "SPENTO", "UIT", "NEE", "ONWAAR", "DESLIGADO", "NÃO", "AV", "FRA", "NEJ",
		"WYŁ", "WYŁ.", "VYP", "VYPNUTO", "POIS", "KAPALI", "オフ", "关", "關", "閉"}
)

// full is what a drive gives that is switched on, %.
const full = 100

// switchOf reads a word for a switched drive: full when on, 0 when off.
func switchOf(cell []byte) (percent float64, ok bool) {
	if len(cell) == 0 || len(cell) > 20 || cell[0] <= '9' {
		return 0, false
	}
	word := strings.ToUpper(decodeName(trimBlanks(cell)))
	switch {
	case slices.Contains(onWords, word):
		return full, true
	case slices.Contains(offWords, word):
		return 0, true
	}
	return 0, false
}

// switchTally follows the cells of a column that may be switched.
type switchTally struct {
	other int
	seen  []string // some of the words
}

func (s *switchTally) add(cell []byte) {
	_, ok := switchOf(cell)
	if kind, known := knownMissing(cell); known && kind != "OPEN" {
		return
	}
	if !ok {
		s.other++
		return
	}
	if w := decodeName(trimBlanks(cell)); len(s.seen) < 4 && !slices.Contains(s.seen, w) {
		s.seen = append(s.seen, w)
	}
}

// any tells that there were such words. Nothing but OPEN is a broken sensor.
func (s *switchTally) any() bool {
	return len(s.seen) > 1 || len(s.seen) == 1 && !strings.EqualFold(s.seen[0], "OPEN")
}

// switched tells that there was nothing else.
func (s *switchTally) switched() bool { return s.any() && s.other == 0 }

// readSwitched gives a switched input its unit and says how it was read.
func readSwitched(c *column) Note {
	c.unit = "%"
	return Note{Code: "input-switched", Text: fmt.Sprintf(
		"column %q holds words (%s): on was read as 100 %% and off as 0 %%, so the gain is per %%; --input-span 0..230V makes it volts, --cycle the mean of a drive that switches in a fixed cycle",
		c.label, strings.Join(c.words, ", "))}
}

// wordAmongNumbers keeps the first ON or OFF met in an input of numbers: held
// over as if nothing had been recorded it would leave the drive on. Text that
// begins like a number is kept for the same reason.
type wordAmongNumbers struct {
	line int
	word string

	oddLine, odd int
	oddText      string
}

func (w *wordAmongNumbers) look(cell []byte, line int) {
	cell = trimBlanks(cell)
	if _, is := switchOf(cell); is && w.word == "" && !bytes.EqualFold(cell, []byte("OPEN")) {
		w.line, w.word = line, decodeName(bytes.Clone(cell))
	}
	if digits := bytes.TrimLeft(cell, "+-.,"); len(digits) > 0 && digits[0]-'0' <= 9 {
		if _, known := knownMissing(cell); known {
			return
		}
		if w.odd++; w.odd == 1 {
			w.oddLine, w.oddText = line, decodeName(bytes.Clone(cell[:min(len(cell), longestWord)]))
		}
	}
}

// Inputs that cannot be read are held over as long as they are no more than so
// many, or so large a share of the rows: cells damaged on their way.
const (
	damagedCells = 2
	damagedShare = 0.01
)

func (w *wordAmongNumbers) err(path string, rows int) error {
	switch {
	case w.word != "":
		return fmt.Errorf("%s:%d: the input is %q among numbers: write 0 where the drive was off, its full value where it was on, and leave the cell blank where nothing was recorded",
			path, w.line, w.word)
	case w.odd > damagedCells && float64(w.odd) > damagedShare*float64(rows):
		return fmt.Errorf("%s:%d: the input is %q, which is no number as the rest of the column writes them, here and in %d more rows: export it with one decimal mark, one unit and nothing behind the number, or leave the cell blank where nothing was recorded",
			path, w.oddLine, w.oddText, w.odd-1)
	}
	return nil
}
