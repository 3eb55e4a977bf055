package data

import (
	"bytes"
	"strings"
	"sync"
)

// monthNames are the months in the languages whose words are known, in full,
// with the forms that dates decline them to and the abbreviations that are no
// beginnings of them.
var monthNames = [][12]string{
	{"january", "february", "march", "april", "may", "june", "july", "august", "september", "october", "november", "december"},
	{"januar jänner jaenner", "februar feber", "märz maerz mrz", "april", "mai", "juni", "juli", "august", "september", "oktober", "november", "dezember"},
	{"janvier", "février fevrier", "mars", "avril", "mai", "juin", "juillet", "août aout", "septembre", "octobre", "novembre", "décembre decembre"},
	{"enero", "febrero", "marzo", "abril", "mayo", "junio", "julio", "agosto", "septiembre setiembre", "octubre", "noviembre", "diciembre"},
	{"gennaio", "febbraio", "marzo", "aprile", "maggio", "giugno", "luglio", "agosto", "settembre", "ottobre", "novembre", "dicembre"},
	{"januari", "februari", "maart mrt", "april", "mei", "juni", "juli", "augustus", "september", "oktober", "november", "december"},
	{"janeiro", "fevereiro", "março marco", "abril", "maio", "junho", "julho", "agosto", "setembro", "outubro", "novembro", "dezembro"},
	{"januar", "februar", "marts", "april", "maj", "juni", "juli", "august", "september", "oktober", "november", "december"},
	{"januari", "februari", "mars", "april", "maj", "juni", "juli", "augusti", "september", "oktober", "november", "desember"},
	{"styczeń stycznia", "luty lutego", "marzec marca", "kwiecień kwietnia", "maj maja", "czerwiec czerwca", "lipiec lipca", "sierpień sierpnia", "wrzesień września", "październik października", "listopad listopada", "grudzień grudnia"},
	{"leden ledna", "únor února", "březen března", "duben dubna", "květen května", "červen června", "červenec července", "srpen srpna", "září", "říjen října", "listopad listopadu", "prosinec prosince"},
	{"január", "február", "március", "április", "május", "június", "július", "augusztus", "szeptember", "október", "november", "december"},
	{"tammikuu tammikuuta", "helmikuu helmikuuta", "maaliskuu maaliskuuta", "huhtikuu huhtikuuta", "toukokuu toukokuuta", "kesäkuu kesäkuuta", "heinäkuu heinäkuuta", "elokuu elokuuta", "syyskuu syyskuuta", "lokakuu lokakuuta", "marraskuu marraskuuta", "joulukuu joulukuuta"},
	{"ocak", "şubat subat", "mart", "nisan", "mayıs mayis", "haziran", "temmuz", "ağustos agustos", "eylül eylul", "ekim", "kasım kasim", "aralık aralik"},
	{"январь января", "февраль февраля", "март марта", "апрель апреля", "май мая", "июнь июня", "июль июля", "август августа", "сентябрь сентября", "октябрь октября", "ноябрь ноября", "декабрь декабря"},
}

// shortestMonth is the least number of letters that name a month.
const shortestMonth = 3

// monthOfName holds the names of months and their beginnings. One that fits
// two months of a language names none of them, and the first language counts.
var monthOfName = sync.OnceValue(func() map[string]int {
	known := make(map[string]int, 1000)
	for _, language := range monthNames {
		own := map[string]int{}
		for m, forms := range language {
			for _, name := range strings.Fields(forms) {
				letters := []rune(name)
				for n := shortestMonth; n < len(letters); n++ {
					start := string(letters[:n])
					if own[start] != 0 && own[start] != m+1 {
						own[start] = -1
						continue
					}
					own[start] = m + 1
				}
			}
		}
		for m, forms := range language {
			for _, name := range strings.Fields(forms) {
				own[name] = m + 1
			}
		}
		for name, m := range own {
			if _, taken := known[name]; !taken && m > 0 {
				known[name] = m
			}
		}
	}
	return known
})

// monthByName is the number of a month, 0 when the name is none.
func monthByName(b []byte) int {
	return monthOfName()[string(bytes.ToLower([]byte(decodeName(b))))]
}
