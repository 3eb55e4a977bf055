package data

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"maps"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

// mess is a log written with many quirks at once, and what is in it.
type mess struct {
	t0   testing.TB
	rng  *rand.Rand
	text []byte
	how  []string // the quirks drawn, for messages

	t, u, y, sp []float64
	input       string // unit of the input
}

// pick draws one of several ways and remembers its name.
func pick[T any](m *mess, what string, ways map[string]T) T {
	var names []string
	for name := range ways {
		names = append(names, name)
	}
	slices.Sort(names)
	name := names[m.rng.IntN(len(names))]
	m.how = append(m.how, what+" "+name)
	return ways[name]
}

// language holds the names of clock, input, temperature, setpoint and another
// temperature.
type language struct {
	names [5]string
	latin bool // can be written in Windows-1252
}

var languages = map[string]language{
	"English":    {[5]string{"Time", "Heater voltage", "Outlet temperature", "Setpoint", "Room"}, true},
	"German":     {[5]string{"Zeit", "Heizspannung", "Austrittstemperatur", "Sollwert", "Umgebung"}, true},
	"French":     {[5]string{"Heure", "Tension de chauffe", "Température soufflage", "Consigne", "Ambient"}, true},
	"Spanish":    {[5]string{"Hora", "Tensión calefactor", "Temperatura salida aire", "Consigna", "Ambient"}, true},
	"Italian":    {[5]string{"Ora", "Tensione riscaldatore", "Temperatura aria", "Riferimento", "Ambient"}, true},
	"Dutch":      {[5]string{"Tijd", "Spanning verwarming", "Uitlaattemperatuur", "Setpunt", "Ambient"}, true},
	"Portuguese": {[5]string{"Hora", "Tensão", "Temperatura do ar", "Referência", "Ambient"}, true},
	"Polish":     {[5]string{"Czas", "Napięcie grzałki", "Temperatura wylotu", "Zadana", "Ambient"}, false},
	"Swedish":    {[5]string{"Tid", "Spänning", "Temperatur utlopp", "Börvärde", "Ambient"}, true},
	"Czech":      {[5]string{"Čas", "Napětí topení", "Teplota výstupu", "Žádaná hodnota", "Ambient"}, false},
	"Japanese":   {[5]string{"時刻", "ヒータ電圧", "出口温度", "設定温度", "Ambient"}, false},
	"Chinese":    {[5]string{"时间", "加热电压", "出口温度", "设定温度", "Ambient"}, false},
	"loop":       {[5]string{"Timestamp", "OP", "PV", "SP", "Ambient"}, true},
}

// clockForm writes the instant of a row: one cell or two, or a number.
type clockForm struct {
	unit    string
	columns []string // names, where there are two
	cells   func(at time.Time, s float64) []string
	number  bool // its decimal mark is that of the file
	blank   bool // holds blanks, or can be blank
	held    bool // leaves out the date
}

func stampForm(layout string) clockForm {
	return clockForm{cells: func(at time.Time, _ float64) []string { return []string{at.Format(layout)} }, blank: strings.Contains(layout, " ")}
}

func twoForms(a, b string) clockForm {
	return clockForm{columns: []string{"Date", "Time"}, blank: strings.Contains(b, " "), cells: func(at time.Time, _ float64) []string { return []string{at.Format(a), at.Format(b)} }}
}

func countForm(unit string, f func(at time.Time, s float64) string) clockForm {
	return clockForm{unit: unit, number: true, cells: func(at time.Time, s float64) []string { return []string{f(at, s)} }}
}

var clockForms = map[string]clockForm{
	"elapsed s":    countForm("s", func(_ time.Time, s float64) string { return fmt.Sprintf("%.3f", s) }),
	"elapsed ms":   countForm("ms", func(_ time.Time, s float64) string { return fmt.Sprintf("%.0f", 1000*s+12345) }),
	"elapsed min":  countForm("min", func(_ time.Time, s float64) string { return fmt.Sprintf("%.10f", s/60) }),
	"unix s":       countForm("", func(at time.Time, _ float64) string { return fmt.Sprintf("%d.%03d", at.Unix(), at.Nanosecond()/1e6) }),
	"unix ms":      countForm("", func(at time.Time, _ float64) string { return strconv.FormatInt(at.UnixMilli(), 10) }),
	"ISO":          stampForm("2006-01-02 15:04:05.000"),
	"RFC 3339":     stampForm("2006-01-02T15:04:05.000Z07:00"),
	"dots":         stampForm("02.01.2006 15:04:05.000"),
	"slashes":      stampForm("2006/01/02 15:04:05.000"),
	"day first":    stampForm("2/1/2006 15:04:05.000"),
	"month first":  stampForm("01/02/2006 03:04:05.000 PM"),
	"month's name": stampForm("02-Jan-06 15:04:05.000"),
	"time of day":  stampForm("15:04:05.000"),
	"half days":    stampForm("3:04:05.000 PM"),
	"colon": {blank: true, cells: func(at time.Time, _ float64) []string {
		return []string{strings.Replace(at.Format("2006-01-02 15:04:05.000"), ".", ":", 1)}
	}},
	"zone's name": stampForm("2006-01-02 15:04:05.000 CET"),
	"offset":      stampForm("2006-01-02 15:04:05.000 -0700"),
	"day's name":  stampForm("Mon 02 Jan 2006 15:04:05.000"),
	"basic":       stampForm("20060102T150405.000"),
	"comma":       stampForm("02.01.2006 15:04:05,000"),
	"spelt": {blank: true, cells: func(at time.Time, _ float64) []string {
		half := map[bool]string{true: " a. m.", false: " p.\u00a0m."}[at.Hour() < 12]
		return []string{at.Format("02/01/06 03:04:05.000") + half}
	}},
	"unix us":     countForm("", func(at time.Time, _ float64) string { return strconv.FormatInt(at.UnixMicro(), 10) }),
	"day number":  countForm("", func(at time.Time, _ float64) string { return dayNumberOf(at) }),
	"compact":     stampForm("20060102150405.000"),
	"two columns": twoForms("02.01.2006", "15:04:05.000"),
	"two, AM/PM":  twoForms("01/02/2006", "03:04:05.000 PM"),
	"ctime":       stampForm("Mon Jan _2 15:04:05.000 2006"),
	"ctime, zone": stampForm("Mon Jan 2 15:04:05.000 UTC 2006"),
	"RFC 1123":    stampForm("Mon, 02 Jan 2006 15:04:05.000 GMT"),
	"day of year": stampForm("2006-002T15:04:05.000"),
	"brackets":    stampForm("[2006-01-02 15:04:05.000]"),
	"literal":     stampForm("DT#2006-01-02-15:04:05.000"),
	"dashes":      stampForm("2006-01-02-15-04-05.000"),
	"signs":       stampForm("2006年01月02日 15:04:05.000"),
	"place":       stampForm("2006-01-02 15:04:05.000 Europe/Madrid"),
	"days in front": {blank: true, cells: func(_ time.Time, s float64) []string {
		s += 86390
		return []string{fmt.Sprintf("%d days %s", int(s)/86400, time.UnixMilli(int64(1000*s)).UTC().Format("15:04:05.000"))}
	}},
	"bare digits": {columns: []string{"Date", "Time"}, cells: func(at time.Time, _ float64) []string {
		return []string{at.Format("20060102"), strings.TrimLeft(strings.Replace(at.Format("150405.000"), ".", "", 1), "0") + map[bool]string{true: "0"}[at.Format("150405.000") == "000000.000"]}
	}},
	"seven columns": {columns: []string{"Year", "Month", "Day", "Hour", "Minute", "Second", "ms"}, cells: func(at time.Time, _ float64) []string {
		return strings.Fields(fmt.Sprint(at.Year(), " ", int(at.Month()), at.Day(), at.Hour(), at.Minute(), at.Second(), at.Nanosecond()/1e6))
	}},
	"milliseconds apart": {columns: []string{"Date", "Time", "Millis"}, cells: func(at time.Time, _ float64) []string {
		return []string{at.Format("2006-01-02"), at.Format("15:04:05"), strconv.Itoa(at.Nanosecond() / 1e6)}
	}},
	"day and milliseconds": {columns: []string{"Day", "ms"}, cells: func(at time.Time, _ float64) []string {
		return []string{strconv.Itoa(at.YearDay()), strconv.Itoa((at.Hour()*3600+at.Minute()*60+at.Second())*1000 + at.Nanosecond()/1e6)}
	}},
}

// heldForms write the date in some rows only: they are no forms for a log
// whose tags stand one below the other.
var heldForms = map[string]clockForm{
	"date in the first row": {blank: true, columns: []string{"Date", "Time"}, cells: func(at time.Time, s float64) []string {
		return []string{map[bool]string{true: at.Format("02.01.2006")}[s == 0], at.Format("15:04:05.000")}
	}},
	"date where it changes": {blank: true, held: true, cells: func(at time.Time, s float64) []string {
		return []string{map[bool]string{true: at.Format("2006-01-02 ")}[s == 0 || at.Hour() == 0 && at.Minute() == 0 && at.Second() == 0 && at.Nanosecond() == 0] + at.Format("15:04:05.000")}
	}},
}

// wideForms are all forms of a clock.
func wideForms() map[string]clockForm {
	all := maps.Clone(clockForms)
	maps.Copy(all, heldForms)
	return all
}

// dayNumberOf is a spreadsheet's number of an instant, with twelve decimals.
func dayNumberOf(at time.Time) string {
	ns := at.UnixNano()
	const day = int64(24 * time.Hour)
	return fmt.Sprintf("%d.%012.0f", 25569+ns/day, float64(ns%day)/float64(day)*1e12)
}

// newMess writes a log of some rows in a way drawn at random. The recording
// passes midnight.
func newMess(t testing.TB, seed uint64) *mess {
	m := &mess{t0: t, rng: rand.New(rand.NewPCG(seed, 11))}
	n := []int{9, 30}[m.rng.IntN(2)] + m.rng.IntN(40)
	step := []float64{0.5, 0.25, 1, 2}[m.rng.IntN(4)]
	start := time.Date(2026, 1, 25, 23, 59, 50, 0, time.UTC)
	temp := 24.0
	for i := range n {
		m.t = append(m.t, float64(i)*step)
		m.u = append(m.u, []float64{0, 2.5, 1.25}[i*3/n])
		temp += (24 + 10*m.u[i] - temp) * 0.15
		m.y = append(m.y, math.Round(10*temp+3*m.rng.NormFloat64())/10)
		m.sp = append(m.sp, []float64{60, 65.5}[i*2/n])
	}
	if seed%5 == 4 {
		m.writeLong(start)
	} else {
		m.write(start)
	}
	return m
}

// writeLong writes rows of time, tag and value: each temperature, but input
// and setpoint only when they change.
func (m *mess) writeLong(start time.Time) {
	m.input = "V"
	form := pick(m, "clock", clockForms)
	for !form.number && !strings.Contains(form.cells(start, 0)[0], "6") { // without a date it is unknown which tag passed midnight
		form = pick(m, "clock", clockForms)
	}
	delim := pick(m, "delimiter", map[string]byte{"comma": ',', "semicolon": ';', "tab": '\t'})
	comma := delim != ',' && m.rng.IntN(2) == 0
	lang := pick(m, "words", languages)
	quality := pick(m, "quality", map[string]string{"none": "", "word": "Good", "number": "192"})
	apart := pick(m, "unit", map[string]bool{"in the tag": false, "in a column": true})
	number := func(s string) string {
		if comma {
			return strings.Replace(s, ".", ",", 1)
		}
		return s
	}
	names := form.columns
	if names == nil {
		names = []string{"Timestamp"}
		if form.unit != "" {
			names[0] += "_" + form.unit
		}
	}
	names = append(slices.Clone(names), "Tag", "Value")
	if quality != "" {
		names = append(names, "Quality")
	}
	if apart {
		names = append(names, "Units")
	}
	join := func(cells []string) string {
		for i, c := range cells {
			if strings.IndexByte(c, delim) >= 0 {
				cells[i] = `"` + c + `"`
			}
		}
		return strings.Join(cells, string(delim))
	}
	lines := []string{join(names)}
	put := func(i int, tag, unit string, v float64) {
		cells := form.cells(start.Add(time.Duration(m.t[i]*1e9)), m.t[i])
		if form.number {
			cells[0] = number(cells[0])
		}
		if !apart {
			tag += " (" + unit + ")"
		}
		cells = append(cells, tag, number(strconv.FormatFloat(v, 'f', -1, 64)))
		if quality != "" {
			cells = append(cells, quality)
		}
		if apart {
			cells = append(cells, unit)
		}
		lines = append(lines, join(cells))
	}
	for i := range m.t {
		if i == 0 || m.u[i] != m.u[i-1] {
			put(i, lang.names[1], "V", m.u[i])
		}
		put(i, lang.names[2], "°C", m.y[i])
		if i == 0 || m.sp[i] != m.sp[i-1] {
			put(i, lang.names[3], "°C", m.sp[i])
		}
	}
	m.pack(strings.Join(lines, "\n")+"\n", lang.latin)
}

func (m *mess) write(start time.Time) {
	delim := pick(m, "delimiter", map[string]byte{"comma": ',', "semicolon": ';', "tab": '\t', "pipe": '|', "blanks": ' '})
	comma := pick(m, "decimal mark", map[string]bool{"point": false, "comma": true})
	form := pick(m, "clock", wideForms())
	if form.blank && delim == ' ' {
		delim = '\t'
	}
	quoted := delim != ' ' && m.rng.IntN(4) == 0 || delim == ',' && (comma || strings.Contains(form.cells(start, 0)[0], ","))
	lang := pick(m, "words", languages)
	unitStyle := pick(m, "units", map[string]string{"in round brackets": "%s (%s)", "in brackets": "%s [%s]", "after a slash": "%s / %s", "in a row": ""})
	number := func(s string) string {
		if comma {
			return strings.Replace(s, ".", ",", 1)
		}
		return s
	}
	short := func(v float64) string { return number(strconv.FormatFloat(v, 'f', -1, 64)) }

	type col struct {
		names, units []string
		cells        func(i int) []string
	}
	one := func(name, unit string, f func(i int) string) col {
		return col{[]string{name}, []string{unit}, func(i int) []string { return []string{f(i)} }}
	}
	clockNames := form.columns
	if clockNames == nil {
		clockNames = lang.names[:1]
	}
	units := make([]string, len(clockNames))
	units[0] = form.unit
	missing := map[int]string{}
	for range m.rng.IntN(4) {
		missing[5+m.rng.IntN(len(m.y)-5)] = []string{"OL", map[bool]string{true: "?"}[delim == ' '], "----", short(9999), short(-999.9), "NaN", "Bad", "OPEN"}[m.rng.IntN(8)]
	}
	clock := col{clockNames, units, func(i int) []string {
		cells := form.cells(start.Add(time.Duration(m.t[i]*1e9)), m.t[i])
		if form.number {
			cells[0] = number(cells[0])
		}
		return cells
	}}
	outlet := one(lang.names[2], "°C", func(i int) string {
		if w, is := missing[i]; is {
			return w
		}
		return short(m.y[i])
	})
	drive := pick(m, "input", map[string]func() col{
		"V": func() col { m.input = "V"; return one(lang.names[1], "V", func(i int) string { return short(m.u[i]) }) },
		"in cell": func() col {
			m.input = "V"
			return one(lang.names[1], "", func(i int) string { return short(m.u[i]) + "V" })
		},
		"thousands": func() col {
			m.input = "W"
			for i := range m.u {
				m.u[i] *= 1000
			}
			return one(lang.names[1], "W", func(i int) string {
				mark := map[bool]string{true: ".", false: "'"}[comma]
				thousands, rest := int(m.u[i])/1000, int(m.u[i])%1000
				if thousands == 0 {
					return number(fmt.Sprintf("%d.00", rest))
				}
				return fmt.Sprintf("%d%s%03d%s", thousands, mark, rest, number(".00"))
			})
		},
		"switched": func() col {
			m.input = "%"
			on, off := m.rng.IntN(4), 0.0
			for i := range m.u {
				m.u[i] = max(off, min(full, 1e6*m.u[i]))
			}
			return one(lang.names[1], "", func(i int) string {
				return [][2]string{{"OFF", "ON"}, {"Aus", "Ein"}, {"false", "true"}, {"OPEN", "CLOSED"}}[on][int(m.u[i]/full)]
			})
		},
	})()
	cols := []col{drive, outlet,
		one(lang.names[3], "°C", func(i int) string { return short(m.sp[i]) })}
	at := m.rng.IntN(2) // the clock stands first or last
	var before []col
	extras := map[string]func(){
		"none":   func() {},
		"room":   func() { cols = append(cols, one(lang.names[4], "°C", func(int) string { return short(21.5) })) },
		"status": func() { cols = append(cols, one("Status", "", func(int) string { return "OK" })) },
		"blank": func() {
			if delim != ' ' {
				cols = append(cols, one("", "", func(int) string { return "" }))
			}
		},
		"index": func() {
			if delim != ' ' && at == 0 {
				before = append(before, one("", "", func(i int) string { return strconv.Itoa(i) }))
			}
		},
		"mode": func() { cols = append(cols, one("Mode", "", func(int) string { return "MAN" })) },
		"remark": func() {
			if delim != ' ' {
				cols = append(cols, one("Remark", "", func(i int) string { return map[int]string{3: "bump, by hand"}[i%7] }))
			}
		},
		"number": func() { cols = append(cols, one("No.", "", func(i int) string { return strconv.Itoa(i + 1) })) },
	}
	for range 2 {
		pick(m, "extra", extras)()
	}
	m.rng.Shuffle(len(cols), func(i, j int) { cols[i], cols[j] = cols[j], cols[i] })
	cols = append(before[:min(1, len(before))], slices.Insert(cols, at*len(cols), clock)...)

	around := "%s"
	if quoted {
		around = pick(m, "quotes", map[string]string{"plain": `"%s"`, "protected": `="%s"`, "protected in quotes": `"=""%s"""`})
	}
	trailing := delim != ' ' && m.rng.IntN(5) == 0
	line := func(cells []string) string {
		for i, c := range cells {
			switch {
			case quoted:
				cells[i] = fmt.Sprintf(around, c)
			case delim != ' ' && strings.IndexByte(c, delim) >= 0:
				cells[i] = `"` + c + `"`
			}
			if delim == ' ' {
				cells[i] = fmt.Sprintf("%8s", strings.ReplaceAll(c, " ", "_"))
			}
		}
		text := strings.Join(cells, string(delim))
		if trailing {
			text += string(delim)
		}
		return text
	}
	var names, unitRow []string
	for _, c := range cols {
		for i, n := range c.names {
			if unitStyle != "" && c.units[i] != "" {
				n = fmt.Sprintf(unitStyle, n, c.units[i])
			}
			if unitStyle == "" && delim == ' ' && c.units[i] == "" {
				c.units[i] = "-"
			}
			names, unitRow = append(names, n), append(unitRow, c.units[i])
		}
	}
	lines := pick(m, "preamble", map[string][]string{
		"none": nil, "title": {"Test of the drying tunnel"}, "pairs": {"Serial" + string(delim) + "4711", "Operator" + string(delim) + "A. Miller", ""},
		"wide": {strings.Repeat("Report"+string(delim), 12), ""}, "comments": {"# logger 3", "# period " + short(0.5)},
	})
	lines = slices.Clone(lines)
	header := []string{line(names)}
	if unitStyle == "" {
		header = append(header, line(unitRow))
	}
	lines = append(lines, header...)
	restart, gap := -1, -1
	if m.rng.IntN(4) == 0 {
		restart = len(m.t) / 2
		m.how = append(m.how, "header again")
	}
	if m.rng.IntN(4) == 0 {
		gap = len(m.t) / 3
		m.how = append(m.how, "blank line")
	}
	var rows []string
	for i := range m.t {
		if i == restart {
			rows = append(rows, header...)
		}
		if i == gap {
			rows = append(rows, "")
		}
		var cells []string
		for _, c := range cols {
			cells = append(cells, c.cells(i)...)
		}
		rows = append(rows, line(cells))
	}
	switch order := pick(m, "order", map[string]int{"plain": 0, "as it was": 0, "newest first": 1, "five sent again": 2}); {
	case order == 1 && restart < 0:
		slices.Reverse(rows)
	case order == 2 && restart < 0 && gap < 0 && !form.held: // where the date changes in its own row, rows sent again from before it cannot be told from a gap
		k := 6 + m.rng.IntN(len(rows)-6)
		rows = slices.Insert(rows, k, slices.Clone(rows[k-5:k])...)
	}
	lines = append(lines, rows...)
	if delim != ' ' && pick(m, "rows", map[string]bool{"plain": false, "as they are": false, "each in quotes": true}) {
		for i, l := range lines {
			lines[i] = `"` + strings.ReplaceAll(l, `"`, `""`) + `"`
		}
	}
	lines = append(lines, pick(m, "end", map[string][]string{"none": nil, "blank": {"", ""}, "words": {"", "End of log"}, "NUL": {strings.Repeat("\x00", 40)}})...)
	for i := range missing {
		m.y[i] = nan
	}
	end := pick(m, "lines end with", map[string]string{"LF": "\n", "CRLF": "\r\n", "CR": "\r"})
	m.pack(strings.Join(lines, end)+end, lang.latin)
}

// pack encodes and packs the text.
func (m *mess) pack(text string, latin bool) {
	plain := func(s string) ([]byte, error) { return []byte(s), nil }
	encodings := map[string]func(s string) ([]byte, error){
		"UTF-8":           plain,
		"UTF-8 with mark": func(s string) ([]byte, error) { return []byte("\uFEFF" + s), nil },
		"UTF-16 LE": func(s string) ([]byte, error) {
			return unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewEncoder().Bytes([]byte(s))
		},
		"UTF-16 BE": func(s string) ([]byte, error) {
			return unicode.UTF16(unicode.BigEndian, unicode.UseBOM).NewEncoder().Bytes([]byte(s))
		},
	}
	if latin && !strings.Contains(text, "年") {
		encodings["Windows-1252"] = func(s string) ([]byte, error) { return charmap.Windows1252.NewEncoder().Bytes([]byte(s)) }
	}
	b, err := pick(m, "encoding", encodings)(text)
	if err != nil {
		panic(err)
	}
	m.text = b
	if how := pick(m, "packed", map[string]string{"no": "", "not": "", "gzip": "gz", "zstd": "zst"}); how != "" {
		m.text = packed(m.t0, how, b)
	}
}

// Quirks in combination: whatever is drawn, the values are those written. The
// long form of the test draws ten thousand.
func TestCombined(t *testing.T) {
	draws := uint64(300)
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		draws = 10000
	}
	for seed := range draws {
		m := newMess(t, seed)
		m.check(t, seed, bytes.NewReader(m.text))
	}
}

// check reads what draw seed wrote and compares it with what it stands for.
func (m *mess) check(t *testing.T, seed uint64, file io.Reader) {
	t.Helper()
	runs, err := Read(context.Background(), "-", Options{Stdin: file})
	bad := ""
	if err != nil {
		bad = err.Error()
	} else {
		bad = m.compare(runs[0])
	}
	if bad != "" {
		t.Errorf("draw %d (%s): %s", seed, strings.Join(m.how, ", "), bad)
	}
}

func (m *mess) compare(r *Run) string {
	for _, c := range []struct {
		what      string
		got, want []float64
		within    float64
	}{{"time", r.T, m.t, 1e-7}, {"input", r.U, m.u, 0}, {"temperature", r.Y, m.y, 0}, {"setpoint", r.Setpoint, m.sp, 0}} {
		if len(c.got) != len(c.want) {
			return fmt.Sprintf("%d values of %s, want %d; %+v", len(c.got), c.what, len(c.want), r.Source.Columns)
		}
		for i, v := range c.got {
			if both := v != v && c.want[i] != c.want[i]; !both && !(math.Abs(v-c.want[i]) <= c.within) {
				return fmt.Sprintf("%s in row %d is %v, want %v; %+v", c.what, i, v, c.want[i], r.Source.Columns)
			}
		}
	}
	if r.Units.Input != m.input || r.Units.Temperature != "degC" {
		return fmt.Sprintf("units %+v", r.Units)
	}
	return ""
}
