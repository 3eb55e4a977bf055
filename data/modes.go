package data

import (
	"slices"
	"strings"
)

// autoWords and manualWords are how controllers write their mode.
var (
	autoWords   = []string{"AUTO", "A", "AUTOMATIC", "AUTOMATIK", "CASCADE", "CAS", "CLOSED", "CLOSED LOOP", "1", "TRUE", "ON", "REGELN"}
	manualWords = []string{"MAN", "M", "MANUAL", "HAND", "MANUELL", "MANUEL", "MANUALE", "OPEN", "OPEN LOOP", "0", "FALSE", "OFF", "STEUERN"}
)

// modeOf reads a mode: 1 automatic, 0 manual, -1 neither.
func modeOf(cell []byte) int8 {
	word := strings.ToUpper(decodeName(trimBlanks(cell)))
	word = strings.TrimSuffix(word, ".0")
	switch {
	case slices.Contains(autoWords, word):
		return 1
	case slices.Contains(manualWords, word):
		return 0
	}
	if on, ok := switchOf(cell); ok {
		return int8(on / full)
	}
	return -1
}

// badStatus are the words of a status column that take back the value beside
// them.
var badStatus = []string{
	"BAD", "B", "UNCERTAIN", "ERROR", "ERR", "FAIL", "FAILED", "FAULT", "INVALID", "OPEN", "BURNOUT", "OVERRANGE", "UNDERRANGE",
	"SENSOR FAULT", "NO DATA", "SUSPECT", "FEHLER", "UNGÜLTIG", "SCHLECHT", "MAUVAIS", "MALO", "FALSE",
}

// goodStatus are the words of a status column that say nothing.
var goodStatus = []string{"GOOD", "OK", "VALID", "NORMAL", "GUT", "BON", "BUENO", "BUONO", "GOED", "BOM", "DOBRY", "BRA"}

func isGoodStatus(cell []byte) bool {
	return slices.Contains(goodStatus, strings.ToUpper(decodeName(trimBlanks(cell))))
}

// goodQuality is the quality of a good value in open process control data
// (OPC data access: 192 to 255 good, 64 to 127 uncertain, below bad; from
// memory).
const goodQuality = 192

// isQuality tells that a column of status holds such numbers.
func isQuality(rows []line, i int) bool {
	return i >= 0 && slices.ContainsFunc(rows, func(l line) bool { return i < len(l.cells) && string(l.cells[i]) == "192" })
}

// badStatus tells that a status takes back the value beside it.
func (c *csvReader) badStatus(cell []byte) bool {
	if c.quality {
		v, ok := c.d.format.parse(cell)
		return ok && v < goodQuality
	}
	return isBadStatus(cell)
}

func isBadStatus(cell []byte) bool {
	if len(cell) == 0 {
		return false
	}
	return slices.Contains(badStatus, strings.ToUpper(decodeName(trimBlanks(cell))))
}
