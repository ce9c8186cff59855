package ingest

import (
	"bytes"
	"fmt"
)

// stampReader reads a column of stamps. Stamps that follow each other mostly
// share all but their clock, so only that is read again.
type stampReader struct {
	order   order
	decided bool // a slashed date has settled the order
	slashed bool
	started bool
	zoned   bool
	turn    bool             // the stamps read so far are to be swapped
	abbr    map[string]int64 // ms that the site's zone is ahead of UTC under its abbreviations
	word    string           // first zone word that says nothing

	text       []byte // last stamp read in full
	from, to   int    // its clock, as hh:mm or hh:mm:ss
	ms, ofDay  int64
	twelve     bool
	fastUsable bool
}

// turned reports, once, that the last stamp settled that days come first, so that
// day and month of those before it are to be swapped.
func (s *stampReader) turned() bool {
	t := s.turn
	s.turn = false
	return t
}

// read reads one stamp.
func (s *stampReader) read(b []byte) (int64, bool) {
	if s.fastUsable && string(b) == string(s.text) { // several points at one time
		return s.ms, true
	}
	if s.fastUsable && len(b) == len(s.text) && string(b[:s.from]) == string(s.text[:s.from]) && string(b[s.to:]) == string(s.text[s.to:]) {
		if ofDay, ok := shortClock(b[s.from:s.to], s.twelve); ok {
			copy(s.text[s.from:s.to], b[s.from:s.to])
			s.ms, s.ofDay = s.ms+ofDay-s.ofDay, ofDay
			return s.ms, true
		}
	}
	c, ok := parseStamp(b, s.order)
	if !ok || c.form == formTimeOnly {
		return 0, false
	}
	if c.word != "" {
		if off, ok := s.abbr[c.word]; ok {
			c.ms, c.zoned = c.ms-off, true
		} else if s.word == "" {
			s.word = c.word
		}
	}
	if !s.started {
		s.started, s.zoned = true, c.zoned
	} else if c.zoned != s.zoned {
		return 0, false
	}
	if c.form == formSlashed || c.form == formSlashOnly {
		s.slashed = true
		if s.order == orderUnknown && !s.decided {
			switch {
			case c.a > 12:
				s.order, s.decided, s.turn = dayFirst, true, true
			case c.b > 12:
				s.order, s.decided = monthFirst, true
			}
		}
	}
	s.remember(b, c)
	return c.ms, true
}

func (s *stampReader) remember(b []byte, c civil) {
	s.fastUsable = false
	i := bytes.IndexByte(b, ':')
	if i < 2 || i+3 > len(b) || c.form == formEpoch {
		return
	}
	s.from, s.to = i-2, i+3
	if s.to+3 <= len(b) && b[s.to] == ':' {
		s.to += 3
	}
	tail := bytes.ToLower(b[s.to:])
	s.twelve = bytes.Contains(tail, []byte("am")) || bytes.Contains(tail, []byte("pm")) || bytes.Contains(tail, []byte("a.m")) || bytes.Contains(tail, []byte("p.m"))
	ofDay, ok := shortClock(b[s.from:s.to], s.twelve)
	if !ok {
		return
	}
	s.text = append(s.text[:0], b...)
	s.ms, s.ofDay, s.fastUsable = c.ms, ofDay, true
}

// shortClock reads hh:mm or hh:mm:ss, all digits there.
func shortClock(b []byte, twelve bool) (int64, bool) {
	if len(b) < 5 || b[2] != ':' {
		return 0, false
	}
	h1, h2, m1, m2 := b[0]-'0', b[1]-'0', b[3]-'0', b[4]-'0'
	if h1 > 2 || h2 > 9 || m1 > 5 || m2 > 9 {
		return 0, false
	}
	h := int64(h1)*10 + int64(h2)
	if h > 23 {
		return 0, false
	}
	if twelve {
		if h < 1 || h > 12 {
			return 0, false
		}
		h %= 12
	}
	ms := h*3_600_000 + (int64(m1)*10+int64(m2))*60_000
	if len(b) == 8 {
		s1, s2 := b[6]-'0', b[7]-'0'
		if b[5] != ':' || s1 > 5 || s2 > 9 {
			return 0, false
		}
		ms += (int64(s1)*10 + int64(s2)) * 1000
	}
	return ms, true
}

var errOrder = fmt.Errorf("its dates can be read day first or month first")

// settle decides, at the end of a file whose dates never went past 12, which
// order they are in: the one in which the record goes on from midnight to
// midnight while in the other it leaps by months. swap says that day and month are
// to be swapped.
func (s *stampReader) settle(ms []int64) (swap bool, err error) {
	if !s.slashed || s.order != orderUnknown || s.decided {
		return false, nil
	}
	leaps := func(of func(int64) int64) (n, days int) {
		for i := 1; i < len(ms); i++ {
			a, b := of(ms[i-1]), of(ms[i])
			if floorDiv(a, dayMS) == floorDiv(b, dayMS) {
				continue
			}
			days++
			if d := b - a; d > 20*dayMS || d < -20*dayMS {
				n++
			}
		}
		return n, days
	}
	asRead, days := leaps(func(x int64) int64 { return x })
	swapped, _ := leaps(swapDayMonth)
	switch {
	case days >= 2 && asRead == 0 && swapped == days:
		return false, nil
	case days >= 2 && swapped == 0 && asRead == days:
		return true, nil
	}
	return false, errOrder
}

func floorDiv(a, b int64) int64 {
	q := a / b
	if a%b < 0 {
		q--
	}
	return q
}

// swapDayMonth reads a stamp the other way round. Both its day and its month are
// at most 12.
func swapDayMonth(ms int64) int64 {
	day := floorDiv(ms, dayMS)
	y, m, d := civilFromDays(day)
	return ms + (daysFromCivil(y, d, m)-day)*dayMS
}

// civilFromDays is the inverse of daysFromCivil.
func civilFromDays(z int64) (y, m, d int) {
	z += 719468
	era := floorDiv(z, 146097)
	doe := z - era*146097
	yoe := (doe - doe/1460 + doe/36524 - doe/146096) / 365
	doy := doe - (365*yoe + yoe/4 - yoe/100)
	mp := (5*doy + 2) / 153
	d = int(doy - (153*mp+2)/5 + 1)
	m = int(mp + 3)
	if m > 12 {
		m -= 12
	}
	y = int(yoe + era*400)
	if m <= 2 {
		y++
	}
	return y, m, d
}
