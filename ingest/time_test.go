package ingest

import (
	"strings"
	"testing"
	"time"
)

func TestParseStamp(t *testing.T) {
	const utc, local = true, false
	for _, tt := range []struct {
		in    string
		o     order
		want  string // of the clock shown, or UTC where zoned
		zoned bool
	}{
		{"2026-05-01T10:05:00Z", 0, "2026-05-01 10:05:00", utc},
		{"2026-05-01T10:05:00+01:00", 0, "2026-05-01 09:05:00", utc},
		{"2026-05-01T10:05:00-0500", 0, "2026-05-01 15:05:00", utc},
		{"2026-05-01 10:05:00+01", 0, "2026-05-01 09:05:00", utc},
		{"2026-05-01 10:05 UTC", 0, "2026-05-01 10:05:00", utc},
		{"2026-05-01T10:05:00+01:00[Europe/Lisbon]", 0, "2026-05-01 09:05:00", utc},
		{"2026-05-01T10:05", 0, "2026-05-01 10:05:00", local},
		{"2026-05-01 10:05:30.250", 0, "2026-05-01 10:05:30.25", local},
		{"2026-05-01 10:05:30,250", 0, "2026-05-01 10:05:30.25", local},
		{"2026/05/01 10:05", 0, "2026-05-01 10:05:00", local},
		{"20260501 1005", 0, "2026-05-01 10:05:00", local},
		{"20260501T100530", 0, "2026-05-01 10:05:30", local},
		{"2026-05-01", 0, "2026-05-01 00:00:00", local},
		{"02.01.2026 15:04", 0, "2026-01-02 15:04:00", local},
		{"2.1.26 15:04", 0, "2026-01-02 15:04:00", local},
		{"03/04/2026 15:04", dayFirst, "2026-04-03 15:04:00", local},
		{"03/04/2026 15:04", monthFirst, "2026-03-04 15:04:00", local},
		{"13/04/2026 15:04", 0, "2026-04-13 15:04:00", local},
		{"3/4/26 3:04 PM", monthFirst, "2026-03-04 15:04:00", local},
		{"3/4/2026 12:00:00 AM", monthFirst, "2026-03-04 00:00:00", local},
		{"3/4/2026 12:30 pm", monthFirst, "2026-03-04 12:30:00", local},
		{"3/4/2026 1:05:09 p.m.", monthFirst, "2026-03-04 13:05:09", local},
		{"02-Jan-2026 15:04", 0, "2026-01-02 15:04:00", local},
		{"2-Jan-26 3:04:05 PM EST", 0, "2026-01-02 15:04:05", local},
		{"2 January 2026 15:04", 0, "2026-01-02 15:04:00", local},
		{"January 2, 2026 3:04 PM", 0, "2026-01-02 15:04:00", local},
		{"Fri Jan 2 2026 15:04", 0, "2026-01-02 15:04:00", local},
		{"2026-Jan-02 15:04", 0, "2026-01-02 15:04:00", local},
		{"2026-05-01 24:00", 0, "2026-05-02 00:00:00", local},
		{"2024-02-29 00:00", 0, "2024-02-29 00:00:00", local},
		{"1777629900", 0, "2026-05-01 10:05:00", utc},
		{"1777629900000", 0, "2026-05-01 10:05:00", utc},
		{"1777629900.5", 0, "2026-05-01 10:05:00.5", utc},
		// Day 46143 of a spreadsheet is 2026-05-01 (1900 date system, from memory):
		// 46143 - 25569 days after 1970-01-01.
		{"46143.5", 0, "2026-05-01 12:00:00", local},
	} {
		c, ok := parseStamp([]byte(tt.in), tt.o)
		got := time.UnixMilli(c.ms).UTC().Format("2006-01-02 15:04:05.999")
		if !ok || got != tt.want || c.zoned != tt.zoned {
			t.Errorf("parseStamp(%q) = %s zoned %v, %v; want %s zoned %v", tt.in, got, c.zoned, ok, tt.want, tt.zoned)
		}
	}
}

func TestParseStampRefuses(t *testing.T) {
	for _, s := range []string{"", "hello", "2026-13-01 00:00", "2026-02-29 00:00", "31/11/2026 00:00", "2026-05-01 25:00", "2026-05-01 10:61", "2026-05-01 13:00 PM",
		"21.5", "42", "2026", "2026-05", "99/99/2026 00:00", "2026-05-01 10:05 something else", "10.05.2026.7", "2026-05-01 10", "\xff\xfe", "1:2:3:4"} {
		if c, ok := parseStamp([]byte(s), orderUnknown); ok && c.form != formTimeOnly {
			t.Errorf("%q was read as %s", s, time.UnixMilli(c.ms).UTC())
		}
	}
}

func TestDaysFromCivil(t *testing.T) {
	for d := int64(-30_000); d < 90_000; d += 7 {
		y, m, day := civilFromDays(d)
		want := time.Unix(d*86400, 0).UTC()
		if y != want.Year() || m != int(want.Month()) || day != want.Day() {
			t.Fatalf("day %d is %d-%d-%d, package time says %v", d, y, m, day, want)
		}
		if daysFromCivil(y, m, day) != d {
			t.Fatalf("day %d does not come back", d)
		}
	}
}

// The fast path, which reads only the clock of a stamp, agrees with the full
// reading.
func TestStampReaderFastPath(t *testing.T) {
	for _, layout := range []string{"2006-01-02 15:04:05", "2006-01-02T15:04:05Z07:00", "02.01.2006 15:04", "01/02/2006 03:04:05 PM", "2006-01-02T15:04", "2-Jan-2006 15:04", "1/2/2006 3:04 PM"} {
		s := stampReader{order: monthFirst}
		at := time.Date(2026, 4, 28, 22, 0, 0, 0, time.UTC)
		for range 3000 {
			text := at.Format(layout)
			got, ok := s.read([]byte(text))
			want, _ := parseStamp([]byte(text), monthFirst)
			if !ok || got != want.ms {
				t.Fatalf("%q in sequence is %d, alone %d", text, got, want.ms)
			}
			at = at.Add(7 * time.Minute)
		}
	}
}

func TestStampReaderOrder(t *testing.T) {
	at := func(y, m, d, h int) int64 { return time.Date(y, time.Month(m), d, h, 0, 0, 0, time.UTC).UnixMilli() }
	for _, tt := range []struct {
		name string
		in   []string
		want []int64 // nil: cannot be told
	}{
		{"a day over 12 at the end", []string{"11/05/2026 00:00", "12/05/2026 00:00", "13/05/2026 00:00"}, []int64{at(2026, 5, 11, 0), at(2026, 5, 12, 0), at(2026, 5, 13, 0)}},
		{"a month that cannot be", []string{"5/11/2026 00:00", "5/12/2026 00:00", "5/13/2026 00:00"}, []int64{at(2026, 5, 11, 0), at(2026, 5, 12, 0), at(2026, 5, 13, 0)}},
		{"continuous day first", []string{"01/05/2026 12:00", "02/05/2026 00:00", "02/05/2026 12:00", "03/05/2026 00:00"}, []int64{at(2026, 5, 1, 12), at(2026, 5, 2, 0), at(2026, 5, 2, 12), at(2026, 5, 3, 0)}},
		{"continuous month first", []string{"05/01/2026 12:00", "05/02/2026 00:00", "05/03/2026 00:00"}, []int64{at(2026, 5, 1, 12), at(2026, 5, 2, 0), at(2026, 5, 3, 0)}},
		{"one day", []string{"01/05/2026 00:00", "01/05/2026 01:00"}, nil},
		{"the first of each month, or the first days of January", []string{"01/01/2026 00:00", "01/02/2026 00:00"}, nil},
	} {
		var s stampReader
		var got []int64
		for _, x := range tt.in {
			ms, ok := s.read([]byte(x))
			if !ok {
				t.Fatalf("%s: %q was not read", tt.name, x)
			}
			if s.turned() {
				swapAll(got)
			}
			got = append(got, ms)
		}
		swap, err := s.settle(got)
		if swap {
			swapAll(got)
		}
		if (err != nil) != (tt.want == nil) {
			t.Errorf("%s: error %v", tt.name, err)
			continue
		}
		for i := range tt.want {
			if got[i] != tt.want[i] {
				t.Errorf("%s: %q is %v", tt.name, tt.in[i], time.UnixMilli(got[i]).UTC())
			}
		}
	}
}

// The clocks of Lisbon went back on 25 October 2026 at 01:00 UTC, 02:00 summer
// time to 01:00, and went forward on 29 March at 01:00 UTC (EU directive
// 2000/84/EC; IANA tz database).
func TestClockwork(t *testing.T) {
	lisbon, err := time.LoadLocation("Europe/Lisbon")
	if err != nil {
		t.Fatal(err)
	}
	local := func(s string) int64 {
		x, err := time.Parse("2006-01-02 15:04", s)
		if err != nil {
			t.Fatal(err)
		}
		return x.UnixMilli()
	}
	c := newClockwork(lisbon)
	start := time.Date(2026, 10, 24, 12, 0, 0, 0, time.UTC)
	for i := range 24 * 12 * 3 { // what a logger writes that follows the clock: every 5 min of true time
		want := start.Add(time.Duration(i) * 5 * time.Minute)
		shown := local(want.In(lisbon).Format("2006-01-02 15:04"))
		if got := c.utc(shown); got != want.UnixMilli() {
			t.Fatalf("%v shown as %v is read as %v", want, want.In(lisbon), time.UnixMilli(got).UTC())
		}
	}
	if c.Repeated != 12 || c.Skipped != 0 {
		t.Errorf("repeated %d, skipped %d; want 12 and 0", c.Repeated, c.Skipped)
	}
	c = newClockwork(lisbon)
	for _, tt := range [][2]string{
		{"2026-03-29 00:55", "2026-03-29 00:55"},
		{"2026-03-29 01:30", "2026-03-29 01:30"}, // no such time: as if not yet put forward
		{"2026-03-29 02:00", "2026-03-29 01:00"},
		{"2026-07-01 12:00", "2026-07-01 11:00"},
	} {
		if got := time.UnixMilli(c.utc(local(tt[0]))).UTC().Format("2006-01-02 15:04"); got != tt[1] {
			t.Errorf("%s in Lisbon is %s UTC, want %s", tt[0], got, tt[1])
		}
	}
	if c.Skipped != 1 {
		t.Errorf("skipped %d, want 1", c.Skipped)
	}
}

// A year in a zone with half-hour summer time (Lord Howe Island), read back.
func TestClockworkYear(t *testing.T) {
	for _, zone := range []string{"Australia/Lord_Howe", "America/New_York", "Asia/Kathmandu", "UTC"} {
		z, err := time.LoadLocation(zone)
		if err != nil {
			t.Fatal(err)
		}
		c := newClockwork(z)
		at := time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
		for range 366 * 96 {
			l := at.In(z)
			_, off := l.Zone()
			if got := c.utc(at.UnixMilli() + int64(off)*1000); got != at.UnixMilli() {
				t.Fatalf("%s: %v is read as %v", zone, l, time.UnixMilli(got).In(z))
			}
			at = at.Add(15 * time.Minute)
		}
	}
}

func FuzzParseStamp(f *testing.F) {
	for _, s := range []string{"2026-05-01T10:05:00Z", "03/04/2026 3:04 PM", "02.01.2026 15:04", "1777629900", "46143.5", "2-Jan-26 3:04:05 PM EST", "Fri, 2 Jan 2026 15:04", "24:00", "2026-05-01 10:05:00+01:00[x]", strings.Repeat("1", 48)} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		for _, o := range []order{orderUnknown, dayFirst, monthFirst} {
			if c, ok := parseStamp([]byte(s), o); ok && c.form != formTimeOnly && c.form != formEpoch {
				if y := time.UnixMilli(c.ms).UTC().Year(); y < 1899 || y > 2201 {
					t.Errorf("%q is in the year %d", s, y)
				}
			}
		}
		var r stampReader
		a, ok1 := r.read([]byte(s))
		b, ok2 := r.read([]byte(s))
		if ok1 && (!ok2 || a != b) {
			t.Errorf("%q read twice: %d, then %d (%v)", s, a, b, ok2)
		}
	})
}
