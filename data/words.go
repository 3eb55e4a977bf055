package data

import (
	"slices"
	"strings"
	"unicode"
)

// role is what a column means to a bump test.
type role int

const (
	roleNone role = iota
	roleTime
	roleDate // the date, where date and time of day have a column each
	roleHalf // AM or PM, in a column of its own
	roleInput
	roleTemp
	roleSetpoint
	roleMode
	roleAirflow
	roleInlet
	roleCold // temperature of the thermocouple's reference junction
	roleStatus
	roleRun
	roleTag
	roleValue
	roleUnit  // of the value
	roleOther // known to be none of these: a battery, a room, a serial number
	numRoles
)

// flags names the flag that settles which column has a role.
var flags = [numRoles]string{
	roleTime: "--time-col", roleInput: "--input-col", roleTemp: "--temp-col", roleSetpoint: "--setpoint-col",
	roleMode: "--mode-col", roleAirflow: "--airflow-col", roleInlet: "--inlet-col", roleCold: "--cold-col",
	roleRun: "--run-col",
}

// roleNames are the roles in words, for messages.
var roleNames = [numRoles]string{
	roleTime: "time", roleInput: "input", roleTemp: "temperature", roleSetpoint: "setpoint", roleMode: "mode",
	roleAirflow: "airflow", roleInlet: "inlet temperature", roleCold: "cold junction", roleStatus: "status", roleRun: "run",
	roleTag: "tag", roleValue: "value",
}

// vocabulary holds what loggers call a column, in lower case: names that are
// the whole name of the column, and words that are a part of it. Words of
// five letters and more are also found inside compounds.
type vocabulary struct {
	whole, words []string
}

// words of English, German, French, Spanish, Italian, Dutch, Portuguese,
// Polish, Czech, Hungarian, Swedish, Danish, Norwegian, Finnish, Turkish,
// Russian, Japanese and Chinese.
var words = [numRoles]vocabulary{
	roleTime: {
		whole: []string{"t", "ts", "tid", "ora", "data", "czas", "čas", "idő", "aika"},
		words: []string{"time", "timestamp", "datetime", "date", "elapsed", "clock", "zeit", "uhrzeit", "datum", "zeitstempel",
			"temps", "heure", "horodatage", "hora", "fecha", "tiempo", "tempo", "orario", "tijd", "tijdstip", "data/hora", "czas", "tidpunkt",
			"čas", "cas", "tid", "idő", "aika", "zaman", "tarih", "время", "時刻", "時間", "日時", "时间", "日期",
			"sec", "secs", "second", "seconds", "sekunden", "millis", "msec", "epoch", "unix", "instant"},
	},
	roleInput: {
		whole: []string{"u", "op", "mv", "out", "co", "lmn", "y_out", "cv"},
		words: []string{"voltage", "volt", "volts", "heater", "input", "drive", "power", "duty", "output", "actuator", "manipulated", "control",
			"spannung", "heizung", "heizspannung", "stellgröße", "stellgroesse", "stellwert", "stellgrad", "ausgang", "leistung", "ansteuerung",
			"tension", "chauffage", "chauffe", "commande", "sortie", "puissance", "tensión", "voltaje", "calefactor", "calentador", "salida", "potencia",
			"tensione", "riscaldatore", "uscita", "comando", "spanning", "verwarming", "uitgang", "tensão", "aquecedor", "saída",
			"napięcie", "grzałka", "spänning", "värmare", "utsignal",
			"heat", "heating", "relay", "ssr", "contactor", "triac", "thyristor", "scr", "relais", "schütz", "heizer", "heizstab", "relé", "relè", "stycznik",
			"napětí", "topení", "ohřev", "výkon", "feszültség", "fűtés", "spænding", "spenning", "varme", "varmelegeme", "effekt", "jännite", "lämmitin", "lämmitys", "teho",
			"gerilim", "ısıtıcı", "напряжение", "нагреватель", "мощность", "電圧", "ヒータ", "出力", "操作量", "电压", "加热", "功率", "输出"},
	},
	roleTemp: {
		whole: []string{"y", "pv", "temp", "x", "t_out", "tc", "tout"},
		words: []string{"temperature", "temp", "outlet", "thermocouple", "tc", "pv", "process", "measurement",
			"temperatur", "lufttemperatur", "zuluft", "zulufttemperatur", "supply_air", "austritt", "austrittstemperatur", "istwert", "thermoelement", "messwert", "abluft",
			"température", "soufflage", "mesure", "temperatura", "termopar", "salida_aire", "medida", "misura", "termocoppia",
			"temperatuur", "thermokoppel", "uitlaat", "meetwaarde", "medição", "pomiar", "temperaturen", "ärvärde", "utlopp",
			"teplota", "hőmérséklet", "lämpötila", "sıcaklık", "sıcaklığı", "температура", "温度"},
	},
	roleSetpoint: {
		whole: []string{"r", "sp", "w", "ref", "rsp", "lsp"},
		words: []string{"setpoint", "set-point", "sp", "setpt", "set", "reference", "target", "wanted", "demand",
			"sollwert", "soll", "führungsgröße", "consigne", "consigna", "riferimento", "setpunt", "gewenst", "referência", "zadana", "börvärde", "referens",
			"vorgabe", "ajuste", "deseado", "deseada", "desejado", "desejada", "impostata", "impostato", "instelwaarde", "nastawa", "žádaná", "zadaná", "alapjel",
			"inställd", "sætpunkt", "settpunkt", "ønsket", "asetusarvo", "ayar", "уставка", "задание", "設定", "目標", "设定", "设置", "目标"},
	},
	roleMode: {
		whole: []string{"mode", "a/m", "auto", "am"},
		words: []string{"mode", "auto/man", "automan", "automatic", "betriebsart", "automatik", "modus", "modo", "modalità", "tryb", "läge"},
	},
	roleAirflow: {
		words: []string{"airflow", "flow", "air_velocity", "velocity", "volumenstrom", "风量", "流量", "風量", "luftstrom", "durchfluss", "luftmenge", "débit", "debit",
			"caudal", "portata", "luchtstroom", "debiet", "vazão", "przepływ", "flöde", "luftflöde"},
	},
	roleInlet: {
		whole: []string{"t_in", "tin"},
		words: []string{"inlet", "intake", "eintritt", "ansaugung", "eintrittstemperatur", "entrée", "entree", "entrada",
			"ingresso", "inlaat", "wlot", "inlopp", "vstup", "入口", "进口", "进风"},
	},
	roleCold: {
		whole: []string{"cj", "cjc", "cjt"},
		words: []string{"cj", "cjc", "cold", "cold_junction", "coldjunction", "reference_junction", "vergleichsstelle", "soudure", "giunto", "unión_fría", "koude"},
	},
	roleStatus: {
		words: []string{"status", "quality", "flag", "valid", "alarm", "state", "qualität", "gültig", "qualité", "état", "calidad", "estado",
			"qualità", "stato", "kwaliteit", "qualidade", "kvalitet"},
	},
	roleRun: {whole: []string{"run", "run_id", "runid", "test_id", "lauf"}},
	roleTag: {
		words: []string{"tag", "tagname", "variable", "channel", "signal", "point", "sensor", "name", "kanal", "messstelle", "entity", "field", "metric", "voie", "canal", "canale", "kanaal"},
	},
	roleValue: {
		words: []string{"value", "reading", "val", "wert", "messwert", "valeur", "valor", "valore", "waarde", "wartość", "värde"},
	},
	roleOther: {
		whole: []string{"sample", "samples", "sample no", "sample no.", "sample number", "sample #", "scan", "scan no", "scan no.", "scan number", "count", "counter",
			"number", "nummer", "#", "point no", "point no.", "messung", "lfd", "lfd.", "numéro", "número", "numero"},
		words: []string{"battery", "ambient", "room", "sheath", "element", "board", "cpu", "panel", "supply_voltage", "mains", "humidity",
			"pressure", "raum", "umgebung", "batterie", "feuchte", "druck", "index", "row", "record", "nr", "no", "serial", "current", "ampere",
			"error", "deviation", "alarm", "fault", "trip", "interlock", "fan", "blower", "pump", "lamp", "door", "rh"},
	},
}

// wordsOf splits the name of a column into words: at everything that is not a
// letter or a digit, and where a capital follows a small letter.
func wordsOf(name string) []string {
	var out []string
	var w []rune
	flush := func() {
		if len(w) > 0 {
			out = append(out, strings.ToLower(string(w)))
			w = w[:0]
		}
	}
	runes := []rune(name)
	for i, r := range runes {
		if !unicode.IsLetter(r) && !unicode.IsDigit(r) {
			flush()
			continue
		}
		if i > 0 && unicode.IsUpper(r) && unicode.IsLower(runes[i-1]) {
			flush()
		}
		w = append(w, r)
	}
	flush()
	return out
}

// hit scores how well a name fits a vocabulary: 3 for the whole name, 2 for a
// word of it, 1 for a part of a compound, 0 for nothing.
func (v vocabulary) hit(name string, parts []string) int {
	lower := strings.ToLower(strings.TrimSpace(name))
	if slices.Contains(v.whole, lower) || slices.Contains(v.words, lower) {
		return 3
	}
	joined := strings.Join(parts, "_")
	best := 0
	for _, w := range v.words {
		switch {
		case slices.Contains(parts, strings.TrimRight(w, "0123456789")):
			best = max(best, 2)
		case strings.Contains(w, "_") && strings.Contains(joined, w):
			best = max(best, 2)
		case len(w) >= 5 && strings.Contains(joined, w):
			best = max(best, 1)
		}
	}
	for _, w := range v.whole {
		if len(w) > 1 && slices.Contains(parts, w) {
			best = max(best, 2)
		}
	}
	return best
}
