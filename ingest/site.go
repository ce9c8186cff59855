package ingest

import (
	"bytes"
	"fmt"
	"math"
	"regexp"
	"sort"
	"strconv"
	"strings"
	"time"

	"dewledger/ingest/trend"
)

// Setting is one parameter of a rule as site.toml sets it. Only the rules know
// the parameter's unit, so the text is kept.
type Setting struct {
	Pos   string  // "site.toml:42"
	Text  string  // as written, where it is a text with a unit
	Value float64 // where it is a bare number, or Text in the base unit of its dimension
}

// In is the setting in the unit of the parameter.
func (s Setting) In(unit string) (float64, error) {
	if s.Text == "" {
		return s.Value, nil
	}
	return ParseQuantityAs(s.Text, unit)
}

// siteConfig is a site.toml that has been read.
type siteConfig struct {
	site        trend.Site
	measure     bool // stated
	step        time.Duration
	timeColumn  string
	order       order
	abbr        map[string]int64 // of the site's zone, ms ahead of UTC
	weather     string
	weatherLine int
	defaults    trend.Plant
	plants      map[string]trend.Plant
	plantLine   map[string]int
	settings    map[string]map[string]map[string]Setting // unit, rule, parameter; "enabled" for the rule itself
}

// seaLevel is the standard atmosphere's pressure at sea level, Pa (ISO
// 2533:1975).
const seaLevel = 101325

func defaultConfig() *siteConfig {
	nan := math.NaN()
	return &siteConfig{
		site: trend.Site{Zone: time.UTC, ZoneAssumed: true, PressurePa: seaLevel, PressureAssumed: true, Measure: "si",
			Prices: trend.Prices{Electricity: nan, Heat: nan, CoolingCOP: nan}},
		defaults: emptyPlant(),
	}
}

func emptyPlant() trend.Plant {
	nan := math.NaN()
	return trend.Plant{Train: trend.DefaultTrain(), TrainAssumed: true, DesignFlow: nan, DuctArea: nan, MinOAFraction: nan, MinDamper: nan, FanHeat: nan, FanHeatU: nan}
}

// fanHeatU is the standard uncertainty of a fan's temperature rise that a site
// states without one: a rectangular band of half the stated value, as for a
// figure read off a data sheet at another flow (assumption).
func fanHeatU(rise float64) float64 { return 0.5 * math.Abs(rise) / math.Sqrt(3) }

// readSite reads a site.toml, strictly.
func readSite(file string, text []byte) (*siteConfig, error) {
	text = bytes.TrimPrefix(text, []byte{0xef, 0xbb, 0xbf})
	d, err := parseTOML(file, text)
	if err != nil {
		return nil, err
	}
	c := defaultConfig()
	c.plants, c.plantLine = map[string]trend.Plant{}, map[string]int{}
	c.settings = map[string]map[string]map[string]Setting{}
	root := d.table(nil, d.root)
	if t, ok := root.sub("site"); ok {
		c.readSiteTable(t)
	}
	if t, ok := root.sub("prices"); ok {
		c.site.Prices.Electricity, _ = t.quantity("electricity", NoDimension, 0, 1e6)
		c.site.Prices.Heat, _ = t.quantity("heat", NoDimension, 0, 1e6)
		c.site.Prices.CoolingCOP, _ = t.quantity("cooling_cop", NoDimension, 0.5, 30)
		t.done()
	}
	if t, ok := root.sub("schedule"); ok {
		c.readSchedule(t)
	}
	if t, ok := root.sub("accuracy"); ok {
		c.readAccuracy(t)
	}
	if t, ok := root.sub("unit_defaults"); ok {
		c.readPlant(t, &c.defaults, "")
	}
	if t, ok := root.sub("unit"); ok {
		for _, name := range t.keys() {
			u, ok := t.sub(name)
			if !ok {
				continue
			}
			p := c.defaults
			p.Train = append([]trend.Component(nil), p.Train...)
			c.readPlant(u, &p, name)
			c.plants[name] = p
			c.plantLine[name] = t.lineOf(name)
		}
	}
	root.done()
	if err := d.err(); err != nil {
		return nil, err
	}
	return c, nil
}

func (c *siteConfig) readSiteTable(t *table) {
	s := &c.site
	s.Name, _ = t.str("name")
	if z, ok := t.str("timezone"); ok {
		loc, err := time.LoadLocation(z)
		if err != nil || z == "" || z == "Local" {
			t.fail("timezone", `write an IANA name, "Europe/Lisbon" or "UTC"`, "%s is not a known time zone", quote(z))
		} else {
			s.Zone, s.ZoneAssumed = loc, false
		}
	}
	// The lowest settled shore lies at -430 m; the highest town near 5,100 m.
	alt, hasAlt := t.quantity("altitude", Length, -450, 6000)
	p, hasP := t.quantity("pressure", Pressure, 45e3, 110e3)
	switch {
	case hasAlt && hasP:
		t.fail("pressure", "leave one of the two out", "altitude and pressure are both given")
	case hasP:
		s.PressurePa, s.PressureAssumed = p, false
	case hasAlt:
		s.PressurePa, s.PressureAssumed = pressureAtAltitude(alt), false
	}
	if m, ok := t.str("measure"); ok {
		if m != "si" && m != "ip" {
			t.fail("measure", `write "si" or "ip"`, "%s is no system of units", quote(m))
		}
		s.Measure, c.measure = m, true
	}
	if s.Currency, _ = t.str("currency"); len(s.Currency) > 8 {
		t.fail("currency", `write a code such as "EUR"`, "%s is no currency code", quote(s.Currency))
	}
	if h, ok := t.quantity("step", Duration, 1.0/3600, 24); ok {
		c.step = time.Duration(math.Round(h*3600)) * time.Second
		if v, isText := t.m["step"].(string); !isText {
			t.fail("step", `write it with a unit: "5 min"`, "a step needs a unit, and %v has none", t.m["step"])
		} else if c.step < time.Second || 24*time.Hour%c.step != 0 {
			t.fail("step", `use a step such as "1 min", "5 min" or "15 min"`, "a day is not a whole number of steps of %s", quote(v))
		}
	}
	c.timeColumn, _ = t.str("time_column")
	if b, ok := t.boolean("day_first"); ok {
		c.order = monthFirst
		if b {
			c.order = dayFirst
		}
	}
	if w, ok := t.str("rh_below_freezing"); ok {
		switch w {
		case "ice":
			s.RHOverIce = true
		case "water":
		default:
			t.fail("rh_below_freezing", `write "water" or "ice"`, "%s is neither water nor ice", quote(w))
		}
	}
	c.weather, _ = t.str("weather")
	c.weatherLine = t.lineOf("weather")
	t.done()
}

func (c *siteConfig) readSchedule(t *table) {
	s := &c.site.Schedule
	if spans, ok := t.strs("occupied"); ok {
		s.Given = true
		for _, x := range spans {
			if err := addSpan(s, x); err != nil {
				t.fail("occupied", `write a span as "Mon-Fri 07:00-19:00"`, "%s: %v", quote(x), err)
			}
		}
		for d := range s.Spans {
			s.Spans[d] = mergeSpans(s.Spans[d])
		}
	}
	if days, ok := t.strs("holidays"); ok {
		s.Holidays = map[string]bool{}
		for _, x := range days {
			if _, err := time.Parse("2006-01-02", x); err != nil {
				t.fail("holidays", `write a date as "2026-05-01"`, "%s is not a date", quote(x))
				continue
			}
			s.Holidays[x] = true
		}
	}
	t.done()
}

var dayNames = map[string]time.Weekday{"sun": 0, "mon": 1, "tue": 2, "wed": 3, "thu": 4, "fri": 5, "sat": 6}

var spanForm = regexp.MustCompile(`^([A-Za-z,\- ]+?)\s+(\d{1,2}):(\d{2})\s*-\s*(\d{1,2}):(\d{2})$`)

// addSpan adds "Mon-Fri 07:00-19:00". A span over midnight is split.
func addSpan(s *trend.Schedule, text string) error {
	m := spanForm.FindStringSubmatch(strings.TrimSpace(text))
	if m == nil {
		return fmt.Errorf("not days and two times")
	}
	days, err := parseDays(m[1])
	if err != nil {
		return err
	}
	minute := func(h, min string) (int, bool) {
		a, _ := strconv.Atoi(h)
		b, _ := strconv.Atoi(min)
		return a*60 + b, b < 60 && (a < 24 || (a == 24 && b == 0))
	}
	from, ok1 := minute(m[2], m[3])
	to, ok2 := minute(m[4], m[5])
	switch {
	case !ok1 || !ok2:
		return fmt.Errorf("not a time of day")
	case from == to || from == 1440:
		return fmt.Errorf("the span is empty (a whole day is 00:00-24:00)")
	}
	for d, on := range days {
		if !on {
			continue
		}
		if to > from {
			s.Spans[d] = append(s.Spans[d], trend.DaySpan{From: from, To: to})
			continue
		}
		s.Spans[d] = append(s.Spans[d], trend.DaySpan{From: from, To: 1440})
		if to > 0 {
			s.Spans[(d+1)%7] = append(s.Spans[(d+1)%7], trend.DaySpan{From: 0, To: to})
		}
	}
	return nil
}

func parseDays(text string) (days [7]bool, err error) {
	for _, part := range strings.Split(text, ",") {
		part = strings.ToLower(strings.TrimSpace(part))
		switch part {
		case "daily", "every day", "all":
			days = [7]bool{true, true, true, true, true, true, true}
			continue
		case "weekdays":
			part = "mon-fri"
		case "weekends":
			part = "sat-sun"
		}
		a, b, isRange := strings.Cut(part, "-")
		from, ok := dayOf(a)
		to := from
		if isRange {
			var ok2 bool
			to, ok2 = dayOf(b)
			ok = ok && ok2
		}
		if !ok {
			return days, fmt.Errorf("%s is no day of the week", quote(part))
		}
		for d := from; ; d = (d + 1) % 7 {
			days[d] = true
			if d == to {
				break
			}
		}
	}
	return days, nil
}

func dayOf(s string) (time.Weekday, bool) {
	s = strings.TrimSpace(s)
	if len(s) < 3 {
		return 0, false
	}
	d, ok := dayNames[s[:3]]
	return d, ok && strings.HasPrefix(strings.ToLower(d.String()), s)
}

func mergeSpans(s []trend.DaySpan) []trend.DaySpan {
	sort.Slice(s, func(i, j int) bool { return s[i].From < s[j].From })
	var out []trend.DaySpan
	for _, x := range s {
		if n := len(out); n > 0 && x.From <= out[n-1].To {
			out[n-1].To = max(out[n-1].To, x.To)
			continue
		}
		out = append(out, x)
	}
	return out
}

func (c *siteConfig) readAccuracy(t *table) {
	for _, key := range t.keys() {
		t.used[key] = true
		role, isRole := trend.ParseRole(key)
		kind, isKind := trend.ParseKind(key)
		if isRole {
			kind = role.Kind()
		}
		if (!isRole && !isKind) || role == trend.NoRole && isRole {
			names := trend.RoleNames()
			for k := trend.NoKind + 1; ; k++ {
				if _, ok := trend.ParseKind(k.String()); !ok {
					break
				}
				names = append(names, k.String())
			}
			hint := didYouMean(key, names)
			if hint == "" {
				hint = "accuracy is by role (sa_temp) or by kind (temperature, rh, dewpoint, enthalpy, flow, pressure, position, ...)"
			}
			t.fail(key, hint, "there is no such role or kind")
			continue
		}
		var b trend.Band
		var err error
		switch v := t.m[key].(type) {
		case string:
			b, err = ParseAccuracy(v, kind)
		case int64:
			b.HalfWidth = float64(v)
			err = checkBand(b, kind)
		case float64:
			b.HalfWidth = v
			err = checkBand(b, kind)
		default:
			err = fmt.Errorf("must be a number or a text with a unit, not %s", typeName(v))
		}
		if err != nil {
			t.fail(key, "", "%v", err)
			continue
		}
		if isRole {
			if c.site.AccuracyByRole == nil {
				c.site.AccuracyByRole = map[trend.Role]trend.Band{}
			}
			c.site.AccuracyByRole[role] = b
			continue
		}
		if c.site.AccuracyByKind == nil {
			c.site.AccuracyByKind = map[trend.Kind]trend.Band{}
		}
		c.site.AccuracyByKind[kind] = b
	}
}

// pressureAtAltitude is the pressure of the standard atmosphere, Pa, at z metres
// (ISO 2533:1975, troposphere; as ASHRAE Handbook Fundamentals prints it).
func pressureAtAltitude(z float64) float64 {
	return seaLevel * math.Pow(1-2.25577e-5*z, 5.2559)
}
