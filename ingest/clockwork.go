package ingest

import (
	"math"
	"strings"
	"time"
)

// clockwork turns what a local clock showed into UTC, in the order of the rows:
// in the hour that clocks repeat in autumn, the first pass is summer time and
// what follows it is not.
type clockwork struct {
	zone     *time.Location
	from, to int64 // UTC ms over which off holds
	off      int64 // ms
	last     int64
	started  bool
	Skipped  int // stamps in an hour that clocks skip
	Repeated int // stamps read in the second pass of a repeated hour
}

func newClockwork(zone *time.Location) *clockwork {
	return &clockwork{zone: zone, from: 1, to: 0, last: math.MinInt64}
}

func (c *clockwork) utc(local int64) int64 {
	t := local - c.off
	// Within the span, a day clear of its ends: no other reading is possible.
	if t < c.from+dayMS || t >= c.to-dayMS {
		t = c.search(local)
	}
	c.last, c.started = t, true
	return t
}

// search tries the offsets in force around the stamp.
func (c *clockwork) search(local int64) int64 {
	var first, second int64
	n := 0
	lookAt := func(off int64) {
		t := local - off
		_, o := time.UnixMilli(t).In(c.zone).Zone()
		if int64(o)*1000 == off && (n == 0 || t != first) {
			if n == 0 {
				first = t
			} else {
				second = t
			}
			n++
		}
	}
	_, before := time.UnixMilli(local - dayMS).In(c.zone).Zone()
	_, after := time.UnixMilli(local + dayMS).In(c.zone).Zone()
	lookAt(int64(before) * 1000)
	if after != before {
		lookAt(int64(after) * 1000)
	}
	var t int64
	switch n {
	case 0: // clocks skipped it: as if they had not yet been put forward
		c.Skipped++
		t = local - int64(before)*1000
	case 1:
		t = first
	default:
		if second < first {
			first, second = second, first
		}
		t = first
		if c.started && c.last >= first {
			t = second
			c.Repeated++
		}
	}
	u := time.UnixMilli(t).In(c.zone)
	_, o := u.Zone()
	start, end := u.ZoneBounds()
	c.off, c.from, c.to = int64(o)*1000, math.MinInt64/4, math.MaxInt64/4
	if !start.IsZero() {
		c.from = start.UnixMilli()
	}
	if !end.IsZero() {
		c.to = end.UnixMilli()
	}
	return t
}

// localClock is how a unit's naive stamps are to be read.
type localClock struct {
	zone     *time.Location
	standard bool  // its logger stayed on standard time
	off      int64 // of standard time, ms
}

// utc turns what the local clock showed into UTC.
func (l localClock) utc(ms []int64, file string, notes *notebook) {
	if l.zone == time.UTC {
		return
	}
	if l.standard {
		for i := range ms {
			ms[i] -= l.off
		}
		return
	}
	c := newClockwork(l.zone)
	for i, x := range ms {
		ms[i] = c.utc(x)
	}
	if c.Skipped > 0 {
		notes.addCount(c.Skipped, "clock-skipped", file, "", 0, "times stand in the hour that clocks in %s skip in spring; if the logger keeps standard time all year, give its zone in site.timezone", l.zone)
	}
	if c.Repeated > 0 {
		notes.addCount(c.Repeated, "clock-repeated", file, "", 0, "times in the hour that clocks in %s repeat in autumn were told apart by their order", l.zone)
	}
}

// clockOf judges from the hours at which clocks change how a unit's naive stamps
// are to be read. A logger on the wall's clock has no rows in the hour that spring
// skips, and rows twice in the hour that autumn repeats; one that stays on standard
// time goes on through both.
func (r *Result) clockOf(tables []fileTable, notes *notebook) localClock {
	l := localClock{zone: r.cfg.site.Zone}
	if l.zone == time.UTC {
		return l
	}
	wall, standard, once := 0, 0, 0
	var file string
	var off, at int64
	for i := range tables {
		t := &tables[i]
		if t.zoned {
			continue
		}
		for k := range t.parts {
			ms := t.parts[k].ms
			if len(ms) < 4 {
				continue
			}
			lo, hi := ms[0], ms[len(ms)-1]
			for u := time.UnixMilli(lo).In(l.zone); ; {
				_, end := u.ZoneBounds()
				if end.IsZero() || end.UnixMilli() > hi+dayMS {
					break
				}
				_, before := u.Zone()
				_, after := end.In(l.zone).Zone()
				a, b := end.UnixMilli()+int64(before)*1000, end.UnixMilli()+int64(after)*1000
				u = end.In(l.zone)
				if a == b {
					continue
				}
				from, to := min(a, b), max(a, b)
				n, around := count(ms, from, to), min(count(ms, from-(to-from), from), count(ms, to, to+(to-from)))
				if around == 0 {
					continue // nothing was logged that night
				}
				switch {
				case a < b && n == 0, a > b && 2*n >= 3*around:
					wall++
				case a < b && 2*n >= around:
					standard++
					file, off, at = t.file.ref.name, int64(before)*1000, end.UnixMilli()
				case a > b:
					once++
					if file == "" {
						file, at = t.file.ref.name, end.UnixMilli()
					}
				}
			}
		}
	}
	day := time.UnixMilli(at).In(l.zone).Format("2006-01-02")
	switch {
	case standard > 0 && wall == 0:
		l.standard, l.off = true, off
		notes.add("clock-standard", file, "", 0, "on %s the times go on through the hour that clocks in %s skip: the logger keeps standard time all year, and its times are read so", day, l.zone)
	case once > 0 && wall == 0:
		notes.add("clock-once", file, "", 0, "on %s the hour that clocks in %s repeat stands once: either its second pass was not logged, or the logger keeps standard time; the times are read as the wall's clock. Give the logger's zone in site.timezone if it keeps standard time", day, l.zone)
	}
	return l
}

// count counts the stamps in [from, to).
func count(ms []int64, from, to int64) int {
	n := 0
	for _, x := range ms {
		if x >= from && x < to {
			n++
		}
	}
	return n
}

// zoneWords is how far a zone is ahead of UTC, in ms, under each abbreviation that
// its clocks go by in our time ("est", "cest"). One that meant two things is left
// out.
func zoneWords(zone *time.Location) map[string]int64 {
	out, twice := map[string]int64{}, map[string]bool{}
	for y := 2000; y < 2040; y++ {
		for _, m := range []time.Month{time.January, time.July} {
			name, off := time.Date(y, m, 1, 0, 0, 0, 0, zone).Zone()
			w := strings.ToLower(name)
			if strings.ContainsAny(w, "+-0123456789") {
				continue
			}
			if old, ok := out[w]; ok && old != int64(off)*1000 {
				twice[w] = true
			}
			out[w] = int64(off) * 1000
		}
	}
	for w := range twice {
		delete(out, w)
	}
	return out
}
