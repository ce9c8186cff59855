package ingest

import (
	"bytes"
	"math"
	"strconv"
)

// order is how an all-number date like 3/4/2026 is to be read.
type order uint8

const (
	orderUnknown order = iota
	dayFirst
	monthFirst
)

// stampForm says what a stamp's text was, so that a column can be held to one
// reading.
type stampForm uint8

const (
	formNone      stampForm = iota
	formDated               // year first, dotted, or with the month in letters: one reading only
	formSlashed             // a/b/yyyy or a-b-yyyy: day or month first
	formEpoch               // seconds or milliseconds since 1970-01-01 UTC
	formSerial              // days since 1899-12-30, as spreadsheets count
	formDateOnly            // formDated without a time of day
	formTimeOnly            // a time of day without a date
	formSlashOnly           // formSlashed without a time of day
)

// civil is one parsed stamp. ms counts from 1970-01-01 00:00: of UTC where zoned,
// else of whatever the local clock showed. For a slashed date a and b are its
// first two numbers and ms follows the order asked for.
type civil struct {
	form  stampForm
	ms    int64
	zoned bool
	word  string // letters after the clock that may name a zone, lower case
	a, b  uint8
}

const dayMS = 86_400_000

// daysFromCivil counts days from 1970-01-01 in the proleptic Gregorian calendar
// (the era arithmetic of 400 years of 146,097 days, beginning in March).
func daysFromCivil(y, m, d int) int64 {
	if m <= 2 {
		y--
	}
	era := y / 400
	if y < 0 {
		era = (y - 399) / 400
	}
	yoe := y - era*400
	mp := (m + 9) % 12
	doy := (153*mp+2)/5 + d - 1
	doe := yoe*365 + yoe/4 - yoe/100 + doy
	return int64(era)*146097 + int64(doe) - 719468
}

var monthDays = [13]int{0, 31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31}

func validDate(y, m, d int) bool {
	if m < 1 || m > 12 || d < 1 || d > monthDays[m] || y < 1900 || y > 2200 {
		return false
	}
	return m != 2 || d < 29 || (y%4 == 0 && (y%100 != 0 || y%400 == 0))
}

// scanner walks over a stamp.
type scanner struct {
	b []byte
	i int
}

func (s *scanner) peek() byte {
	if s.i < len(s.b) {
		return s.b[s.i]
	}
	return 0
}

func (s *scanner) blanks() {
	for s.i < len(s.b) && (s.b[s.i] == ' ' || s.b[s.i] == '\t') {
		s.i++
	}
}

// number reads up to nine digits and says how many there were.
func (s *scanner) number() (v, n int) {
	for s.i < len(s.b) && isDigit(s.b[s.i]) && n < 9 {
		v = v*10 + int(s.b[s.i]-'0')
		s.i++
		n++
	}
	return v, n
}

// word reads letters, at most max of them counted into the lower-case result.
func (s *scanner) word() string {
	start := s.i
	for s.i < len(s.b) && (s.b[s.i]|0x20 >= 'a' && s.b[s.i]|0x20 <= 'z' || s.b[s.i] >= 0x80) {
		s.i++
	}
	return string(bytes.ToLower(s.b[start:s.i]))
}

var months = map[string]int{
	"jan": 1, "feb": 2, "mar": 3, "apr": 4, "may": 5, "jun": 6, "jul": 7, "aug": 8, "sep": 9, "sept": 9, "oct": 10, "nov": 11, "dec": 12,
	"january": 1, "february": 2, "march": 3, "april": 4, "june": 6, "july": 7, "august": 8, "september": 9, "october": 10, "november": 11, "december": 12,
	"mär": 3, "mrz": 3, "mai": 5, "okt": 10, "dez": 12,
}

var weekdays = map[string]bool{"mon": true, "tue": true, "wed": true, "thu": true, "fri": true, "sat": true, "sun": true,
	"monday": true, "tuesday": true, "wednesday": true, "thursday": true, "friday": true, "saturday": true, "sunday": true, "tues": true, "thurs": true}

// parseStamp reads one stamp: ISO 8601 with or without a zone, year-first,
// dotted, slashed and dashed dates, months in letters, 12- and 24-hour clocks,
// seconds and milliseconds since 1970, spreadsheet days. o settles slashed dates;
// where it is unknown they are read month first if they can be.
func parseStamp(b []byte, o order) (civil, bool) {
	b = trimBlank(b)
	if len(b) < 4 || len(b) > 48 {
		return civil{}, false
	}
	if c, ok := parseCount(b); ok {
		return c, true
	}
	s := &scanner{b: b}
	var c civil
	if w := bytes.IndexAny(b, ":"); w > 0 && w <= 2 { // begins with a clock
		ms, ok := s.clock()
		if !ok || s.i != len(b) {
			return civil{}, false
		}
		return civil{form: formTimeOnly, ms: ms}, true
	}
	day, ok := s.date(o, &c)
	if !ok {
		return civil{}, false
	}
	c.ms = day * dayMS
	if s.peek() == 'T' || s.peek() == 't' || s.peek() == ',' || s.peek() == '_' {
		s.i++
	}
	s.blanks()
	if s.i == len(b) {
		if c.form == formSlashed {
			c.form = formSlashOnly
		} else {
			c.form = formDateOnly
		}
		return c, true
	}
	if s.peek() == '-' { // "2026-05-01 - 10:00"
		s.i++
		s.blanks()
	}
	ms, ok := s.clock()
	if !ok {
		return civil{}, false
	}
	c.ms += ms
	off, zoned, word, ok := s.zone()
	if !ok || s.i != len(b) {
		return civil{}, false
	}
	c.word = word
	if zoned {
		c.ms -= off
		c.zoned = true
	}
	return c, true
}

// date reads the date part and returns its day.
func (s *scanner) date(o order, c *civil) (int64, bool) {
	c.form = formDated
	if !isDigit(s.peek()) { // "Fri 1 May 2026", "May 1, 2026"
		w := s.word()
		if weekdays[w] {
			for s.peek() == ',' || s.peek() == '.' {
				s.i++
			}
			s.blanks()
			if isDigit(s.peek()) {
				return s.date(o, c)
			}
			w = s.word()
		}
		m := months[w]
		if m == 0 {
			return 0, false
		}
		for s.peek() == ' ' || s.peek() == '.' || s.peek() == '-' {
			s.i++
		}
		d, n := s.number()
		if n < 1 || n > 2 {
			return 0, false
		}
		for s.peek() == ' ' || s.peek() == ',' || s.peek() == '-' {
			s.i++
		}
		y, n := s.number()
		if n == 2 {
			y = century(y)
		} else if n != 4 {
			return 0, false
		}
		return checkDate(y, m, d)
	}
	x, n := s.number()
	switch {
	case n == 8: // 20260501
		return checkDate(x/10000, x/100%100, x%100)
	case n == 4:
		sep := s.peek()
		if sep != '-' && sep != '/' && sep != '.' {
			return 0, false
		}
		s.i++
		m, nm := s.number()
		if nm == 0 { // 2026-May-01
			if m = months[s.word()]; m == 0 {
				return 0, false
			}
			nm = 1
		}
		if nm > 2 || s.peek() != sep {
			return 0, false
		}
		s.i++
		d, nd := s.number()
		if nd < 1 || nd > 2 {
			return 0, false
		}
		return checkDate(x, m, d)
	case n > 2 || n == 0:
		return 0, false
	}
	sep := s.peek()
	if sep != '/' && sep != '-' && sep != '.' && sep != ' ' {
		return 0, false
	}
	s.i++
	if sep == '.' {
		s.blanks()
	}
	if !isDigit(s.peek()) { // 1-May-26
		m := months[s.word()]
		for s.peek() == '.' || s.peek() == ',' {
			s.i++
		}
		if m == 0 || (s.peek() != sep && s.peek() != ' ' && s.peek() != '-') {
			return 0, false
		}
		s.i++
		y, ny := s.number()
		if ny == 2 {
			y = century(y)
		} else if ny != 4 {
			return 0, false
		}
		return checkDate(y, m, x)
	}
	y2, n2 := s.number()
	if n2 > 2 || s.peek() != sep || sep == ' ' {
		return 0, false
	}
	s.i++
	y, ny := s.number()
	if ny == 2 {
		y = century(y)
	} else if ny != 4 {
		return 0, false
	}
	if sep == '.' { // dotted dates are day first wherever they are written
		return checkDate(y, y2, x)
	}
	c.form, c.a, c.b = formSlashed, uint8(x), uint8(y2)
	if o == dayFirst || (o == orderUnknown && x > 12) {
		return checkDate(y, y2, x)
	}
	return checkDate(y, x, y2)
}

func checkDate(y, m, d int) (int64, bool) {
	if !validDate(y, m, d) {
		return 0, false
	}
	return daysFromCivil(y, m, d), true
}

func century(y int) int {
	if y < 70 {
		return 2000 + y
	}
	return 1900 + y
}

// clock reads 15:04, 15:04:05, 15:04:05.000, 3:04 PM, 1504, 150405; 24:00 is
// the end of the day.
func (s *scanner) clock() (int64, bool) {
	h, n := s.number()
	var m, sec, frac int
	switch {
	case n == 4 && s.peek() != ':':
		h, m = h/100, h%100
	case n == 6 && s.peek() != ':':
		h, m, sec = h/10000, h/100%100, h%100
	case n == 1 || n == 2:
		if c := s.peek(); c == ':' || c == '.' || c == 'h' {
			sep := c
			if c == 'h' {
				sep = ':'
			}
			s.i++
			if m, n = s.number(); n != 2 {
				return 0, false
			}
			if s.peek() == sep {
				s.i++
				if sec, n = s.number(); n != 2 {
					return 0, false
				}
				if c := s.peek(); c == '.' || c == ',' || c == ':' {
					s.i++
					v, k := s.number()
					if k == 0 {
						return 0, false
					}
					for ; k < 3; k++ {
						v *= 10
					}
					for ; k > 3; k-- {
						v /= 10
					}
					frac = v
				}
			}
			break
		}
		fallthrough // a bare hour is one only with AM or PM
	default:
		if n == 0 || n > 2 || !s.meridiemAhead() {
			return 0, false
		}
	}
	save := s.i
	s.blanks()
	switch s.peek() | 0x20 {
	case 'a', 'p':
		pm := s.peek()|0x20 == 'p'
		j := s.i + 1
		if j < len(s.b) && s.b[j] == '.' {
			j++
		}
		if j < len(s.b) && s.b[j]|0x20 == 'm' {
			j++
			if j < len(s.b) && s.b[j] == '.' {
				j++
			}
			if h < 1 || h > 12 {
				return 0, false
			}
			h %= 12
			if pm {
				h += 12
			}
			s.i = j
			break
		}
		s.i = save
	default:
		s.i = save
	}
	if h > 24 || m > 59 || sec > 60 || (h == 24 && (m > 0 || sec > 0 || frac > 0)) {
		return 0, false
	}
	return int64(h)*3_600_000 + int64(m)*60_000 + int64(sec)*1000 + int64(frac), true
}

func (s *scanner) meridiemAhead() bool {
	t := bytes.TrimLeft(s.b[s.i:], " ")
	return len(t) >= 2 && (t[0]|0x20 == 'a' || t[0]|0x20 == 'p') && t[1]|0x20 == 'm'
}

// zone reads Z, UTC, GMT, +01:00, +0100, +01. Other zone letters (EST, CET) are
// handed on: the site's zone says what they mean.
func (s *scanner) zone() (off int64, zoned bool, word string, ok bool) {
	s.blanks()
	if s.i == len(s.b) {
		return 0, false, "", true
	}
	c := s.peek()
	if c == '[' { // "...+01:00[Europe/Lisbon]"
		s.i = len(s.b)
		return 0, false, "", true
	}
	if c|0x20 >= 'a' && c|0x20 <= 'z' {
		switch w := s.word(); {
		case w == "z" || w == "utc" || w == "gmt":
			s.blanks()
			if c := s.peek(); c != '+' && c != '-' {
				return 0, true, "", true
			}
		case len(w) >= 2 && len(w) <= 5:
			return 0, false, w, true
		default:
			return 0, false, "", false
		}
	}
	c = s.peek()
	if c != '+' && c != '-' {
		return 0, false, "", false
	}
	s.i++
	h, n := s.number()
	m := 0
	switch n {
	case 4:
		h, m = h/100, h%100
	case 1, 2:
		if s.peek() == ':' {
			s.i++
			if m, n = s.number(); n != 2 {
				return 0, false, "", false
			}
		}
	default:
		return 0, false, "", false
	}
	if h > 15 || m > 59 {
		return 0, false, "", false
	}
	off = int64(h)*3_600_000 + int64(m)*60_000
	if c == '-' {
		off = -off
	}
	s.blanks()
	if s.peek() == '[' {
		s.i = len(s.b)
	}
	return off, true, "", true
}

// parseCount reads seconds or milliseconds since 1970 and spreadsheet days:
// numbers of a size that only a stamp between 1980 and 2100 has.
func parseCount(b []byte) (civil, bool) {
	digits, dot := 0, false
	for _, c := range b {
		switch {
		case isDigit(c) && !dot:
			digits++
		case isDigit(c):
		case c == '.' && !dot:
			dot = true
		default:
			return civil{}, false
		}
	}
	if len(b) > 24 {
		return civil{}, false
	}
	v, err := strconv.ParseFloat(string(b), 64)
	if err != nil {
		return civil{}, false
	}
	const from, to = 315_532_800, 4_102_444_800 // 1980 and 2100, s
	switch {
	case digits == 8 && !dot: // 20260501 is a date
		return civil{}, false
	case v >= from && v < to:
		return civil{form: formEpoch, ms: int64(math.Round(v * 1000)), zoned: true}, true
	case v >= from*1e3 && v < to*1e3:
		return civil{form: formEpoch, ms: int64(v), zoned: true}, true
	case v >= from*1e6 && v < to*1e6:
		return civil{form: formEpoch, ms: int64(v / 1e3), zoned: true}, true
	case v >= from*1e9 && v < to*1e9:
		return civil{form: formEpoch, ms: int64(v / 1e6), zoned: true}, true
	case v >= 29_221 && v < 73_051 && digits == 5:
		ms := math.Round(v*86_400) * 1000 // a day's fraction is good to a second
		return civil{form: formSerial, ms: int64(ms) - 25_569*dayMS}, true
	}
	return civil{}, false
}
