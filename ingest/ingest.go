// Package ingest turns trend files into units on one time axis: it finds the
// files, judges their shape, reads them, brings their values to SI, decides
// which column is which point, and lays all on one regular axis. Whatever it
// assumed, lost or left open it says in notes.
//
// Read does what needs only the heads of the files; Load reads one unit's data.
// A file is never held as text; a unit's columns are.
package ingest

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path"
	"path/filepath"
	"strings"
	"sync"
	"sync/atomic"

	"dewledger/ingest/trend"
)

// Options is what a run was asked to read.
type Options struct {
	Paths       []string  // files, folders, one site folder, or "-"
	Stdin       io.Reader // for "-"
	SitePath    string    // --site; empty: the site folder's site.toml
	PointsPath  string    // --points; empty: the site folder's points.csv
	From, To    string    // --from, --to: a date or an RFC 3339 time; empty: all
	MeasureFlag string    // --measure: "si", "ip" or empty
	Jobs        int       // files sniffed at a time; at most one where 0
}

// Result is what Read found: units that can be loaded one by one. Load may be
// called from several goroutines.
type Result struct {
	Site         trend.Site
	Units        []UnitSource // sorted by name
	Notes        []trend.Note // about the run as a whole
	ScheduleUsed bool         // there is a points.csv
	SiteFile     string       // as shown; empty: none
	PointsFile   string
	// SettingPos has every parameter that site.toml sets for a rule: by unit,
	// rule and parameter; the parameter "" stands for the rule's table itself.
	// The unit "" stands for [unit_defaults].
	SettingPos map[string]map[string]map[string]Setting

	cfg   *siteConfig
	files []*source
	plans []unitPlan
	from  int64 // ms UTC; period asked for
	to    int64
}

// UnitSource is one unit as found.
type UnitSource struct {
	Name    string
	Files   []SourceFile
	Mapping []Mapped
	Notes   []trend.Note
	Plant   trend.Plant
	Err     error // why it cannot be loaded, where that is known already
}

// SourceFile is one file of a unit.
type SourceFile struct {
	Name   string // relative to the site or the command line
	Format Format
	Bytes  int64
}

// Mapped is what became of one column.
type Mapped struct {
	Column  string
	File    string
	Role    trend.Role   // NoRole: not used
	Measure string       // unit of measure; empty: judged from the data when loaded
	By      string       // "schedule" or "guess"; empty where not used for want of a role
	Ground  string       // what the mapping, or its lack, rests on
	Open    []trend.Role // roles that it could be, where that was left open
	Line    int          // of points.csv
	Shared  bool         // with other units

	score int  // how sure the name is
	other bool // another kind of point
}

// source is a trend file whose head has been read.
type source struct {
	ref     *fileRef
	format  Format
	text    *shape
	pq      *parquetShape
	spooled *fileRef // unpacked Parquet
	header  []string // with units
	bare    []string // without
	units   []string
	samples []sample
	status  []int // by column: the column that says how good its readings are, -1: none; nil: none has one
	timeCol int
	clock   int
	stem    string
	dir     string // folder, as shown
	rel     string // for globs: relative to trends/
	single  bool   // one point, of which the file's name tells
	weather bool
	notes   notebook
	err     error
}

// Close lets go of what was kept of standard input and of packed Parquet files.
func (r *Result) Close() error {
	var errs []error
	closed := map[*os.File]bool{} // files of one archive share it
	for _, f := range r.files {
		if f == nil {
			continue
		}
		for _, ref := range []*fileRef{f.ref, f.spooled} {
			if ref != nil && ref.spool != nil && !closed[ref.spool] {
				closed[ref.spool] = true
				errs = append(errs, ref.spool.Close())
			}
		}
	}
	return errors.Join(errs...)
}

// place of one input path.
type input struct {
	files   []*fileRef
	ignored []string
	site    string // site folder, as typed; empty: none
	trends  string // what globs are relative to, as shown
}

// Read finds the files that the options name, reads site.toml, points.csv and
// the files' heads, and decides which columns are which points. Errors of
// configuration are *ConfigError, several of them joined; what is wrong with one
// file or unit is that UnitSource's Err.
func Read(ctx context.Context, o Options) (_ *Result, err error) {
	r := &Result{}
	defer func() {
		if err != nil {
			r.Close()
		}
	}()
	in, err := findInput(ctx, o)
	if err != nil {
		return nil, err
	}
	var notes notebook
	if err := r.readConfig(o, in); err != nil {
		return nil, err
	}
	points, err := r.readSchedule(o, in, &notes)
	if err != nil {
		return nil, err
	}
	if r.from, r.to, err = period(o.From, o.To, r.cfg.site.Zone); err != nil {
		return nil, err
	}
	r.sniffAll(ctx, in, o.Jobs)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if w := r.cfg.weather; w != "" {
		if err := r.weatherFile(ctx, o, in, w); err != nil {
			return nil, err
		}
	}
	if len(r.files) == 0 {
		return nil, &ConfigError{File: strings.Join(o.Paths, ", "), Msg: "there are no trend files in it",
			Hint: "trends are .csv, .tsv, .txt or .parquet files, also .gz, .zst or in a .zip"}
	}
	if n := len(in.ignored); n > 0 {
		notes.addCount(n, "file-ignored", in.ignored[0], "", 0, "%s is not a trend file by its name and was not read", quote(in.ignored[0]))
	}
	if err := r.plan(points, &notes); err != nil {
		return nil, err
	}
	r.siteNotes(&notes)
	r.Notes = notes.list
	return r, nil
}

// sniffAll reads the heads of all files, jobs at a time.
func (r *Result) sniffAll(ctx context.Context, in *input, jobs int) {
	r.files = make([]*source, len(in.files))
	var next atomic.Int64
	var wg sync.WaitGroup
	for range min(max(jobs, 1), max(len(in.files), 1)) {
		wg.Go(func() {
			for ctx.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= len(in.files) {
					return
				}
				r.files[i] = sniffFile(ctx, in.files[i], r.cfg, in.trends)
			}
		})
	}
	wg.Wait()
}

// findInput resolves the paths of the command line.
func findInput(ctx context.Context, o Options) (*input, error) {
	if len(o.Paths) == 0 {
		return nil, &ConfigError{Msg: "no trend file or site folder is named", Hint: "name files, a folder, or - for standard input"}
	}
	in := &input{}
	seen := map[string]bool{}
	for _, p := range o.Paths {
		if p == "-" {
			if o.Stdin == nil {
				return nil, &ConfigError{Msg: "- stands for standard input, and there is none"}
			}
			f, n, err := spool(ctx, o.Stdin)
			if err != nil {
				return nil, fmt.Errorf("standard input: %w", err)
			}
			in.files = append(in.files, &fileRef{name: "-", spool: f, size: n})
			continue
		}
		st, err := os.Stat(p)
		if err != nil {
			return nil, &ConfigError{File: p, Msg: readable(err).Error(), Hint: "check the path; it is taken from the folder the command runs in"}
		}
		clean := filepath.Clean(p)
		if seen[clean] {
			return nil, &ConfigError{File: p, Msg: "it is named twice"}
		}
		seen[clean] = true
		if !st.IsDir() {
			in.files = append(in.files, &fileRef{name: filepath.ToSlash(p), path: p, size: st.Size()})
			continue
		}
		if err := in.addFolder(ctx, p); err != nil {
			return nil, err
		}
	}
	if err := in.unzip(ctx); err != nil {
		return nil, err
	}
	if in.site != "" && len(o.Paths) > 1 {
		return nil, &ConfigError{File: in.site, Msg: "a site folder is read by itself, and other paths are named beside it", Hint: "run once for each site"}
	}
	return in, nil
}

func (in *input) addFolder(ctx context.Context, dir string) error {
	exists := func(name string) (isDir, ok bool) {
		st, err := os.Stat(filepath.Join(dir, name))
		return err == nil && st.IsDir(), err == nil
	}
	trendsDir, hasTrends := exists("trends")
	_, hasSite := exists("site.toml")
	root, shown := dir, ""
	if hasTrends && trendsDir {
		root, shown = filepath.Join(dir, "trends"), "trends"
	}
	if (hasTrends && trendsDir) || hasSite {
		if in.site != "" {
			return &ConfigError{File: dir, Msg: "a second site folder is named", Hint: "run once for each site"}
		}
		in.site = dir
		in.trends = shown
	} else {
		shown = filepath.ToSlash(dir)
		if in.trends == "" {
			in.trends = shown
		}
		for _, name := range scheduleFiles() {
			if _, ok := exists(name); ok {
				in.site = dir
			}
		}
	}
	files, ignored, err := walk(ctx, root, shown)
	if err != nil {
		return &ConfigError{File: dir, Msg: err.Error()}
	}
	for _, f := range files {
		if in.site == dir && root == dir && f.path == "points.csv" {
			continue
		}
		in.files = append(in.files, f)
	}
	for _, g := range ignored {
		switch g {
		case "site.toml", "truth.csv", "README.md", "points.ttl", "points.zinc", "points.json":
		default:
			in.ignored = append(in.ignored, path.Join(shown, g))
		}
	}
	return nil
}

// configFile reads a configuration file: the one the command line names, else
// the site folder's, where there is one.
func configFile(named, site, base string) (shown string, text []byte, err error) {
	file := named
	if file == "" {
		if site == "" {
			return "", nil, nil
		}
		file = filepath.Join(site, base)
		if _, err := os.Stat(file); err != nil {
			return "", nil, nil
		}
	}
	f, err := os.Open(file)
	if err != nil {
		return file, nil, &ConfigError{File: file, Msg: readable(err).Error(), Hint: "check the path"}
	}
	defer f.Close()
	text, err = io.ReadAll(io.LimitReader(f, maxConfig+1))
	if err != nil {
		return file, nil, &ConfigError{File: file, Msg: readable(err).Error()}
	}
	if len(text) > maxConfig {
		return file, nil, &ConfigError{File: file, Msg: fmt.Sprintf("the file is larger than %d MB", maxConfig>>20), Hint: "is it a trend file?"}
	}
	shown = base
	if named != "" {
		shown = filepath.ToSlash(named)
	}
	return shown, text, nil
}

func (r *Result) readConfig(o Options, in *input) error {
	r.cfg = defaultConfig()
	shown, text, err := configFile(o.SitePath, in.site, "site.toml")
	if err != nil {
		return err
	}
	if shown != "" {
		if r.cfg, err = readSite(shown, text); err != nil {
			return err
		}
		r.SiteFile, r.SettingPos = shown, r.cfg.settings
	}
	switch o.MeasureFlag {
	case "":
	case "si", "ip":
		r.cfg.site.Measure = o.MeasureFlag
	default:
		return &ConfigError{Field: "--measure", Msg: quote(o.MeasureFlag) + " is no system of units", Hint: "write si or ip"}
	}
	if r.cfg.site.Name == "" && in.site != "" {
		if abs, err := filepath.Abs(in.site); err == nil {
			r.cfg.site.Name = filepath.Base(abs)
		}
	}
	r.cfg.abbr = zoneWords(r.cfg.site.Zone)
	r.Site = r.cfg.site
	return nil
}

func (r *Result) readSchedule(o Options, in *input, notes *notebook) ([]*point, error) {
	var shown string
	var text []byte
	for _, base := range scheduleFiles() {
		s, t, err := configFile(o.PointsPath, in.site, base)
		if err != nil {
			return nil, err
		}
		switch {
		case s == "":
		case shown != "" && s != shown:
			notes.add("schedule-second", s, "", 0, "%s is not read: %s stands beside it", quote(s), quote(shown))
		default:
			shown, text = s, t
		}
	}
	if shown == "" {
		return nil, nil
	}
	read := func(file string, text []byte, _ *notebook) ([]*point, error) { return readPoints(file, text) }
	for _, f := range modelFormats {
		if strings.EqualFold(filepath.Ext(shown), "."+f.ext) {
			read = readModel
		}
	}
	points, err := read(shown, text, notes)
	if err != nil {
		return nil, err
	}
	r.PointsFile, r.ScheduleUsed = shown, true
	return points, nil
}

func (r *Result) siteNotes(n *notebook) {
	s := &r.cfg.site
	if s.ZoneAssumed {
		n.add("zone-assumed", r.SiteFile, "", 0, "no time zone is given: times without one are read as UTC (site.timezone)")
	}
	if s.PressureAssumed {
		n.add("pressure-assumed", r.SiteFile, "", 0, "no altitude is given: air pressure is taken for sea level's, 101.3 kPa (site.altitude)")
	}
	if !s.Schedule.Given {
		n.add("schedule-assumed", r.SiteFile, "", 0, "no occupied hours are given (schedule.occupied)")
	}
	for name, line := range r.cfg.plantLine {
		found := false
		for i := range r.Units {
			found = found || r.Units[i].Name == name
		}
		if !found {
			n.add("unit-unknown", r.SiteFile, name, line, "site.toml speaks of unit %s, and no trend file has it", quote(name))
		}
	}
	sortNotes(n.list)
}

// weatherFile opens the file that site.weather names.
func (r *Result) weatherFile(ctx context.Context, o Options, in *input, name string) error {
	base := in.site
	if o.SitePath != "" {
		base = filepath.Dir(o.SitePath)
	}
	p := filepath.Join(base, filepath.FromSlash(name))
	if filepath.IsAbs(name) {
		p = name
	}
	st, err := os.Stat(p)
	if err != nil || st.IsDir() {
		return &ConfigError{File: r.SiteFile, Line: r.cfg.weatherLine, Field: "site.weather", Msg: quote(name) + ": no such file", Hint: "the path is relative to site.toml"}
	}
	for _, f := range r.files { // in trends/ already: the same file, now known as the weather
		if q := filepath.Join(f.ref.root, filepath.FromSlash(f.ref.path)); filepath.Clean(q) == filepath.Clean(p) {
			f.weather = true
			return nil
		}
	}
	s := sniffFile(ctx, &fileRef{name: filepath.ToSlash(name), path: p, size: st.Size()}, r.cfg, in.trends)
	s.weather = true
	r.files = append(r.files, s)
	return nil
}
