package ingest

import (
	"math"
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
