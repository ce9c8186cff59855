package ingest

import (
	"bytes"
	"math"
	"strconv"
	"strings"

	"dewledger/ingest/trend"
)

// A missing cell is carried between parsing and alignment as a NaN whose low
// bits are the reason; nothing computes with it before the reason is taken out
// again.
const missingBits = 0x7FF8_0000_0000_0000

func missing(r trend.Reason) float64 { return math.Float64frombits(missingBits | uint64(r)) }

// disabledWord is the cell "disabled": of a switch it is off, of anything else no
// reading.
var disabledWord = math.Float64frombits(missingBits | 1<<8 | uint64(trend.Disabled))

func isDisabledWord(v float64) bool { return math.Float64bits(v) == math.Float64bits(disabledWord) }

func reasonOf(v float64) trend.Reason {
	if r := trend.Reason(math.Float64bits(v) & 0xff); r != trend.Present && r < trend.NumReasons {
		return r
	}
	return trend.Gap
}

// Powers of ten that a float64 holds exactly: a mantissa below 2^53 divided by
// one of them is correctly rounded (Clinger, How to read floating point numbers
// accurately, 1990).
var pow10 = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10,
	1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// plainNumber reads digits with an optional sign and decimal mark, the shape of
// nearly every cell of a trend log, and says whether all of b was that.
func plainNumber(b []byte, mark byte) (float64, bool) {
	i, neg := 0, false
	if len(b) > 0 && (b[0] == '-' || b[0] == '+') {
		neg = b[0] == '-'
		i = 1
	}
	var m uint64
	digits, frac := 0, 0
	for ; i < len(b); i++ {
		c := b[i] - '0'
		if c > 9 {
			break
		}
		m = m*10 + uint64(c)
		digits++
	}
	if i < len(b) && b[i] == mark {
		i++
		start := i
		for ; i < len(b); i++ {
			c := b[i] - '0'
			if c > 9 {
				break
			}
			m = m*10 + uint64(c)
		}
		frac = i - start
		digits += frac
	}
	if i != len(b) || digits == 0 || digits > 18 || m >= 1<<53 || frac >= len(pow10) {
		return 0, false
	}
	v := float64(m) / pow10[frac]
	if neg {
		v = -v
	}
	return v, true
}

// cell is what one value cell held.
type cell struct {
	val  float64 // or missing(reason)
	unit []byte  // text after the number, "°F"; nil where there was none
	word bool    // val stands for a word, "on"
}

// parseCell reads a value cell in full: plain numbers, exponents, thousands
// marks, a trailing unit, a trailing status, words for on and off, marks for missing
// and bad. b has no surrounding quotes. mark is the decimal mark.
func parseCell(b []byte, mark byte) cell {
	b = trimBlank(b)
	if v, ok := plainNumber(b, mark); ok {
		return cell{val: v}
	}
	if len(b) == 0 {
		return cell{val: missing(trend.Gap)}
	}
	if len(b) > 64 {
		return cell{val: missing(trend.NotNumeric)}
	}
	if v, ok := wordValue(b); ok {
		return cell{val: v, word: v == v}
	}
	if v, ok := looseNumber(b, mark); ok {
		return cell{val: v}
	}
	// A number with its unit or its status: "72.3 °F", "45%", "21.5 {stale}".
	n := 0
	for n < len(b) && (isDigit(b[n]) || b[n] == '.' || b[n] == ',' || ((b[n] == '-' || b[n] == '+') && n == 0)) {
		n++
	}
	if n > 0 && n < len(b) && isDigit(b[n-1]) {
		if v, ok := looseNumber(b[:n], mark); ok {
			if unit, why, ok := afterNumber(trimBlank(b[n:])); ok {
				if why != trend.Present {
					v = missing(why)
				}
				return cell{val: v, unit: unit}
			}
		}
		return cell{val: missing(trend.NotNumeric)}
	}
	if why, known := quality(toUTF8(b)); known && why != trend.Present {
		return cell{val: missing(why)}
	}
	return cell{val: missing(trend.NotNumeric)}
}

// afterNumber reads what follows the number in a cell: a unit, a status or both.
func afterNumber(rest []byte) (unit []byte, why trend.Reason, ok bool) {
	if _, known := LookupUnit(string(rest)); known {
		return rest, trend.Present, true
	}
	cut := bytes.IndexAny(rest, "{[(@|;")
	if cut < 0 {
		cut = bytes.IndexByte(rest, ' ') // "72.3 °F stale"
	}
	if cut >= 0 {
		if u := trimBlank(rest[:cut]); len(u) > 0 {
			if _, known := LookupUnit(string(u)); known {
				unit, rest = u, rest[cut:]
			}
		}
	}
	why, ok = quality(strings.TrimLeft(toUTF8(rest), "@|; "))
	return unit, why, ok
}

// looseNumber reads what plainNumber does not: exponents, thousands marks, the
// other decimal mark where only one is there, more digits than 2^53 holds.
func looseNumber(b []byte, mark byte) (float64, bool) {
	b = bytes.TrimSuffix(b, []byte("\u00a0"))
	if !(isDigit(b[0]) || b[0] == '-' || b[0] == '+' || b[0] == '.' || b[0] == ',' || bytes.HasPrefix(b, []byte("−"))) {
		return 0, false
	}
	var buf [80]byte
	t := buf[:0]
	b = bytes.Replace(b, []byte("−"), []byte("-"), 1)
	commas, dots := bytes.Count(b, []byte{','}), bytes.Count(b, []byte{'.'})
	dec := mark
	switch {
	case commas > 0 && dots > 0: // the last one is the decimal mark
		if bytes.LastIndexByte(b, ',') > bytes.LastIndexByte(b, '.') {
			dec = ','
		} else {
			dec = '.'
		}
	case commas > 1 || dots > 1: // several of one sort can only be thousands marks
		dec = 0
	case commas == 1 && mark == '.':
		if groups3(b, ',') {
			dec = 0
		} else {
			dec = ','
		}
	case dots == 1 && mark == ',':
		dec = '.'
	}
	if (dec != ',' && commas > 0 && !groups3(b, ',')) || (dec != '.' && dots > 0 && !groups3(b, '.')) {
		return 0, false
	}
	for i := 0; i < len(b); i++ {
		c := b[i]
		switch {
		case c == ',' || c == '.':
			if c == dec {
				t = append(t, '.')
			}
		case c == '\'', c == ' ', c == 0xc2, c == 0xa0, c == 0xe2, c == 0x80, c == 0xaf: // marks between thousands
			if i == 0 || i+1 >= len(b) {
				return 0, false
			}
		case isDigit(c), c == '-', c == '+', c == 'e', c == 'E':
			t = append(t, c)
		default:
			return 0, false
		}
	}
	v, err := strconv.ParseFloat(string(t), 64)
	if err != nil || math.IsInf(v, 0) || math.IsNaN(v) {
		return 0, false
	}
	return v, true
}

// groups3 reports whether every mark c in b is followed by exactly three digits
// up to the next mark or the end of the digits.
func groups3(b []byte, c byte) bool {
	i := bytes.IndexByte(b, c)
	if i < 1 || i > 4 {
		return false
	}
	for i >= 0 && i < len(b) && b[i] == c {
		n := 0
		for i++; i < len(b) && isDigit(b[i]); i++ {
			n++
		}
		if n != 3 {
			return false
		}
	}
	return true
}

// Words that stand for a value. The German, French and Spanish ones are the
// usual binary states of building-automation exports (common practice, no
// source).
var words = map[string]float64{
	"on": 1, "off": 0, "true": 1, "false": 0, "yes": 1, "no": 0, "active": 1, "inactive": 0,
	"open": 1, "opened": 1, "closed": 0, "close": 0, "shut": 0, "run": 1, "running": 1, "start": 1, "started": 1, "stop": 0, "stopped": 0,
	"occupied": 1, "unoccupied": 0, "occ": 1, "unocc": 0, "enabled": 1, "disabled": disabledWord, "enable": 1, "disable": 0,
	"normal": 0, "alarm": 1, "t": 1, "f": 0,
	"ein": 1, "aus": 0, "an": 1, "auf": 1, "zu": 0, "ja": 1, "nein": 0, "wahr": 1, "falsch": 0,
	"marche": 1, "arret": 0, "arrêt": 0, "ouvert": 1, "ferme": 0, "fermé": 0, "vrai": 1, "faux": 0,
	"encendido": 1, "apagado": 0, "abierto": 1, "cerrado": 0, "marcha": 1, "paro": 0,
}

// Marks for a missing sample, and for one that the export calls bad.
var missingWords = map[string]trend.Reason{
	"-": trend.Gap, "--": trend.Gap, "---": trend.Gap, "----": trend.Gap, "–": trend.Gap, "—": trend.Gap, "nan": trend.Gap, "null": trend.Gap, "none": trend.Gap, "nil": trend.Gap,
	"n/a": trend.Gap, "na": trend.Gap, "#n/a": trend.Gap, "?": trend.Gap, "*": trend.Gap, ".": trend.Gap, "<na>": trend.Gap, "no data": trend.Gap, "nodata": trend.Gap, "missing": trend.Gap, "blank": trend.Gap,
	"#value!": trend.BadQuality, "#ref!": trend.BadQuality, "#div/0!": trend.BadQuality, "inf": trend.BadQuality, "-inf": trend.BadQuality, "+inf": trend.BadQuality, "infinity": trend.BadQuality,
}

func wordValue(b []byte) (float64, bool) {
	if isDigit(b[0]) || len(b) > 20 {
		return 0, false
	}
	low := bytes.ToLower(b)
	if v, ok := words[string(low)]; ok {
		return v, true
	}
	if r, ok := missingWords[string(low)]; ok {
		return missing(r), true
	}
	return 0, false
}

func isDigit(c byte) bool { return c-'0' <= 9 }

// trimBlank drops blanks, tabs and no-break spaces at both ends.
func trimBlank(b []byte) []byte {
	for len(b) > 0 {
		switch {
		case b[0] == ' ' || b[0] == '\t' || b[0] == '\r':
			b = b[1:]
		case len(b) > 1 && b[0] == 0xc2 && b[1] == 0xa0:
			b = b[2:]
		default:
			goto end
		}
	}
end:
	for len(b) > 0 {
		n := len(b)
		switch {
		case b[n-1] == ' ' || b[n-1] == '\t' || b[n-1] == '\r':
			b = b[:n-1]
		case n > 1 && b[n-2] == 0xc2 && b[n-1] == 0xa0:
			b = b[:n-2]
		default:
			return b
		}
	}
	return b
}
