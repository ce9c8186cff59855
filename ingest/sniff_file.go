package ingest

import (
	"bytes"
	"context"
	"errors"
	"path"
	"slices"
	"sort"
	"strings"
	"time"

	"dewledger/ingest/trend"
)

// againMark follows the name of a column that stands twice.
const againMark = " (again)"

// sniffFile reads a file's head. What is wrong with it is its err.
func sniffFile(ctx context.Context, f *fileRef, cfg *siteConfig, trends string) *source {
	s := &source{ref: f, clock: -1, timeCol: -1}
	s.stem, _ = trendName(f.name)
	if f.name == "-" {
		s.stem = ""
	}
	s.dir = path.Dir(f.name)
	s.rel = strings.TrimPrefix(strings.TrimPrefix(f.name, trends), "/")
	if err := s.sniff(ctx, cfg); err != nil {
		if ctx.Err() != nil {
			err = ctx.Err()
		}
		s.err = &UnitError{Unit: s.stem, File: f.name, Msg: "cannot be read", Err: err, Hint: hintFor(err)}
		return s
	}
	s.bare = make([]string, len(s.header))
	for _, st := range s.status {
		if st >= 0 {
			s.notes.add("status-column", s.ref.name, s.header[st], 0, "the column says how good the readings of another are")
		}
	}
	seen := map[string]int{}
	for i, h := range s.header {
		bare, unit := splitHeaderUnit(h)
		if s.bare[i] = bare; s.units[i] == "" {
			s.units[i] = unit
		}
		if s.status != nil && slices.Contains(s.status, i) {
			s.bare[i] = "" // no point
		}
		if first, twice := seen[h]; twice && i != s.timeCol {
			s.notes.add("column-repeated", f.name, h, 0, "columns %d and %d have the same name; the first is used", first+1, i+1)
			s.bare[i], s.header[i] = "", h+againMark
		} else {
			seen[h] = i
		}
	}
	s.nameSingle()
	return s
}

// nameSingle gives the one column of values of a file its name from the file's, where
// its own says nothing: "Value".
func (s *source) nameSingle() {
	at := -1
	for i := range s.header {
		if i == s.timeCol || i == s.clock || s.bare[i] == "" || unitHeads[foldHead(s.bare[i])] {
			continue
		}
		if at >= 0 {
			return
		}
		at = i
	}
	if at >= 0 && s.stem != "" && valueHeads[foldHead(s.bare[at])] {
		s.bare[at], s.single = unitStem(s.stem), true
	}
}

func hintFor(err error) string {
	switch {
	case errors.Is(err, errEmpty), errors.Is(err, errNoRows):
		return "export the trend again; leave the file out if it has no data"
	case errors.Is(err, errNoTime):
		return "a trend file needs a column of dates and times; site.time_column names it where it is not found"
	case errors.Is(err, errOrder):
		return "say which in site.toml: day_first = true or false, under [site]"
	}
	return "check that the file is whole; export it again if it is not"
}

func (s *source) sniff(ctx context.Context, cfg *siteConfig) error {
	in, err := openStream(ctx, s.ref, false)
	if err != nil {
		return err
	}
	defer in.Close()
	magic := make([]byte, 4)
	n, _, err := readHead(in, 4)
	copy(magic, n)
	if err != nil {
		return err
	}
	if bytes.Equal(magic, []byte("PAR1")) {
		s.format = FormatParquet
		return s.sniffParquet(ctx, cfg)
	}
	if strings.Contains(strings.ToLower(path.Base(s.ref.name)), ".parquet") || strings.HasSuffix(strings.ToLower(s.ref.name), ".pq") {
		return errors.New("not a Parquet file, as its name says")
	}
	s.format = FormatCSV
	in.Close()
	if in, err = openStream(ctx, s.ref, false); err != nil {
		return err
	}
	head, whole, err := readHead(textReader(in), headBytes)
	if err != nil && len(head) == 0 {
		return err
	}
	s.text, err = sniffText(head, whole, cfg.timeColumn)
	if err != nil {
		return err
	}
	if cfg.order != orderUnknown {
		s.text.order = cfg.order
	}
	s.header, s.units, s.timeCol, s.clock = s.text.header, s.text.units, s.text.timeCol, s.text.clockCol
	if s.text.headLine == 0 {
		s.notes.add("no-header", s.ref.name, "", 0, "the file has no row of column names; columns are named by their number")
	}
	defer func() { s.text.rows = nil }()
	if s.text.long = isLong(s.text); s.text.long != nil {
		return s.sniffLong(ctx)
	}
	s.samples = make([]sample, len(s.header))
	for c := range s.samples {
		s.samples[c] = sampleOf(s.text.rows, c, s.text.mark)
	}
	s.status = statusColumns(s.header, s.text.rows, s.text.mark)
	return nil
}

// sniffLong reads a narrow file through for the names of its points, which take the
// place of columns.
func (s *source) sniffLong(ctx context.Context) error {
	in, err := openStream(ctx, s.ref, false)
	if err != nil {
		return err
	}
	defer in.Close()
	if s.units, s.samples, err = scanLong(ctx, textReader(in), s.ref.name, s.text, &s.notes); err != nil {
		return err
	}
	s.header, s.timeCol, s.clock = s.text.long.names, -1, -1
	if len(s.header) == 0 {
		return errNoRows
	}
	return nil
}

func (s *source) sniffParquet(ctx context.Context, cfg *siteConfig) error {
	f, err := s.parquetFile(ctx)
	if err != nil {
		return err
	}
	defer f.Close()
	if s.pq, err = sniffParquet(ctx, f, cfg.timeColumn); err != nil {
		return err
	}
	s.pq.order = cfg.order
	s.header, s.units, s.timeCol, s.clock = s.pq.header, s.pq.units, s.pq.timeCol, s.pq.clock
	s.samples = make([]sample, len(s.header))
	if l := s.pq.long; l != nil {
		s.header, s.units, s.samples, s.timeCol, s.clock = l.names, l.units, l.samples, -1, -1
	} else {
		s.status = statusColumns(s.header, nil, '.')
		for c, st := range s.status {
			if st >= 0 && !s.pq.text[st] { // numbers are readings
				s.status[c] = -1
			}
		}
	}
	for _, what := range s.pq.refused {
		s.notes.add("column-refused", s.ref.name, "", 0, "column %s and is not read", what)
	}
	return nil
}

// parquetFile opens a Parquet file for random access, unpacking it first where
// it is packed as a whole.
func (s *source) parquetFile(ctx context.Context) (storedFile, error) {
	if s.spooled != nil {
		return s.spooled.open()
	}
	f, err := s.ref.open()
	if err != nil {
		return nil, readable(err)
	}
	magic := make([]byte, 4)
	if _, err := f.ReadAt(magic, 0); s.ref.entry == 0 && (err != nil || packingOf(magic) == plain) {
		return f, nil
	}
	f.Close()
	in, err := openStream(ctx, s.ref, false)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	tmp, n, err := spool(ctx, in)
	if err != nil {
		return nil, err
	}
	s.spooled = &fileRef{name: s.ref.name, spool: tmp, size: n}
	return s.spooled.open()
}

func sampleOf(rows [][]string, c int, mark byte) sample {
	sm := sample{twoState: true}
	for _, r := range rows {
		sm.add([]byte(r[c]), mark)
	}
	if sm.n == 0 {
		sm.twoState = false
	}
	return sm
}

func (sm *sample) add(cell []byte, mark byte) {
	x := parseCell(cell, mark)
	if isDisabledWord(x.val) {
		x.val, x.word = 0, true
	}
	if x.val != x.val {
		return
	}
	sm.words = sm.words || x.word
	if sm.n == 0 || x.val < sm.lo {
		sm.lo = x.val
	}
	if sm.n == 0 || x.val > sm.hi {
		sm.hi = x.val
	}
	if x.val != 0 && x.val != 1 {
		sm.twoState = false
	}
	sm.n++
}

// period reads --from and --to. A date means from its midnight, or through its
// end, in the site's zone.
func period(from, to string, zone *time.Location) (a, b int64, err error) {
	a, b = minMS, maxMS
	read := func(flag, s string, end bool) (int64, error) {
		if t, err := time.ParseInLocation("2006-01-02", s, zone); err == nil {
			if end {
				t = t.AddDate(0, 0, 1)
			}
			return t.UnixMilli(), nil
		}
		if t, err := time.Parse(time.RFC3339, s); err == nil {
			return t.UnixMilli(), nil
		}
		for _, layout := range []string{"2006-01-02T15:04:05", "2006-01-02T15:04", "2006-01-02 15:04"} {
			if t, err := time.ParseInLocation(layout, s, zone); err == nil {
				return t.UnixMilli(), nil
			}
		}
		return 0, &ConfigError{Field: flag, Msg: quote(s) + " is neither a date nor an RFC 3339 time", Hint: "write 2026-05-01 or 2026-05-01T08:00:00+01:00"}
	}
	if from != "" {
		if a, err = read("--from", from, false); err != nil {
			return
		}
	}
	if to != "" {
		if b, err = read("--to", to, true); err != nil {
			return
		}
	}
	if b <= a {
		err = &ConfigError{Field: "--to", Msg: "the period ends before it begins", Hint: "--from comes before --to"}
	}
	return a, b, err
}

const (
	minMS = -1 << 55
	maxMS = 1 << 55
)

func sortNotes(n []trend.Note) {
	sort.SliceStable(n, func(i, j int) bool {
		a, b := &n[i], &n[j]
		switch {
		case a.Code != b.Code:
			return a.Code < b.Code
		case a.File != b.File:
			return a.File < b.File
		}
		return a.Column < b.Column
	})
}
