package report

import (
	"fmt"
	"html/template"
	"math"
	"slices"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"dewledger/ingest/trend"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

func quantiles(s []float64, a, b float64) (lo, hi float64) {
	slices.Sort(s)
	at := func(q float64) float64 { return s[int(q*float64(len(s)-1)+0.5)] }
	return at(a), at(b)
}

// evidenceWindow is the part of the period that an evidence chart shows: all of
// it, or where that is long, the findings' own stretch with some margin.
func evidenceWindow(ax trend.Axis, f *finding.Finding) (int, int) {
	const most = 45 * 24 * time.Hour
	if time.Duration(ax.N)*ax.Step <= most {
		return 0, ax.N
	}
	i0, i1 := max(0, ax.Index(f.Start)-ax.Intervals(72*time.Hour)), min(ax.N, ax.Index(f.End)+ax.Intervals(72*time.Hour))
	if i1-i0 > ax.Intervals(most) {
		i1 = i0 + ax.Intervals(most)
	}
	return i0, i1
}

// evidenceChart shows a finding's effect with its uncertainty band and the
// flagged spans, above the readings behind it.
func evidenceChart(id string, u *trend.Unit, f *finding.Finding, m finding.Measure) chart {
	ax, tr := u.Axis, &f.Trace
	i0, i1 := evidenceWindow(ax, f)
	c := chart{ID: id, Title: "Effect over time, and the readings behind it"}
	x0, x1 := float64(ax.At(i0).Unix()), float64(ax.At(i1).Unix())
	ticks := timeTicks{u.Site.Zone}

	// The effect, only where the question applied.
	scale := m.Scale(f.UnitOf)
	shown, low, high := make([]float64, ax.N), make([]float64, ax.N), make([]float64, ax.N)
	for i := range shown {
		shown[i], low[i], high[i] = math.NaN(), math.NaN(), math.NaN()
		if tr.Applies[i] && !math.IsNaN(tr.Effect[i]) {
			shown[i] = tr.Effect[i]
			low[i], high[i] = tr.Effect[i]-tr.Expanded[i], tr.Effect[i]+tr.Expanded[i]
		}
	}
	top := newPlot()
	lo, hi := spread(low, i0, i1)
	l2, h2 := spread(high, i0, i1)
	lo, hi = math.Min(math.Min(lo, l2), 0), math.Max(math.Max(hi, h2), f.Matters*1.3)
	// A band far wider than the effect would leave nothing to see of it.
	if v0, v1 := spread(shown, i0, i1); v1 > v0 {
		reach := 2 * math.Max(v1-v0, f.Matters)
		lo, hi = math.Max(lo, math.Min(v0, 0)-reach), math.Min(hi, math.Max(v1, f.Matters)+reach)
	}
	pad := 0.06 * (hi - lo)
	limits(&top.X, x0, x1)
	limits(&top.Y, (lo-pad)*scale, (hi+pad)*scale)
	top.X.Tick.Marker, top.Y.Tick.Marker = ticks, fewTicks{}
	top.Y.Label.Text = axisLabel("effect", f.UnitOf, m)
	var sh [][2]float64
	for _, s := range f.Spans {
		if s.J > i0 && s.I < i1 {
			sh = append(sh, [2]float64{float64(s.Start.Unix()), float64(s.End.Unix())})
		}
	}
	top.Add(shades{inkFlag, sh})
	top.Add(ribbon{inkBand, reducedTo(columns/2, ax, low, i0, i1, scale, 0), reducedTo(columns/2, ax, high, i0, i1, scale, 0)})
	top.Add(level{y: 0, style: stroke(inkText, 0.6, nil)})
	if f.Matters > 0 {
		top.Add(level{y: f.Matters * scale, style: stroke(inkLimit, 1, dashes(5, 3)), label: "what matters, " + m.Value(f.Matters, f.UnitOf, 2)})
	}
	top.Add(strokes{reduced(ax, shown, i0, i1, scale, 0), stroke(inkEffect, 1.1, nil)})

	c.Legend = append(c.Legend,
		legendItem{"effect, where it could be tested", swatch("effect", "", "")},
		legendItem{"its uncertainty", patch("band")}, legendItem{"flagged", patch("flag")})

	panels := []*plot.Plot{top}
	heights := []float64{1.25}
	for _, g := range readingGroups(u, tr.Readings) {
		p := newPlot()
		limits(&p.X, x0, x1)
		p.X.Tick.Marker, p.Y.Tick.Marker = ticks, fewTicks{}
		lo, hi := math.Inf(1), math.Inf(-1)
		nth := 0
		for _, r := range g.roles {
			v := u.Col(r)
			a, b := spread(v, i0, i1)
			if math.IsNaN(a) {
				continue
			}
			lo, hi = math.Min(lo, a), math.Max(hi, b)
			k, shift := scaleShift(m, shownUnit(r))
			l := lineOf(r, nth)
			if r.Station() == trend.NoStation || r.Kind() == trend.Position {
				nth++
			}
			p.Add(strokes{reduced(ax, v, i0, i1, k*rawScale(r), shift), stroke(l.ink, 1, l.dash)})
			c.Legend = append(c.Legend, legendItem{r.Title(), swatch(l.name, l.css, "")})
		}
		if lo > hi {
			continue
		}
		k, shift := scaleShift(m, g.unit)
		raw := rawScale(g.roles[0])
		pad := 0.06 * math.Max(hi-lo, 1e-6)
		limits(&p.Y, (lo-pad)*raw*k+shift, (hi+pad)*raw*k+shift)
		p.Y.Label.Text = axisLabel(g.what, g.unit, m)
		panels, heights = append(panels, p), append(heights, 1)
	}
	c.Alt = fmt.Sprintf("The effect is %s over the flagged time, against %s that matters; flagged for %s of %s hours tested.",
		m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf), m.Value(f.Matters, f.UnitOf, 2), finding.Significant(f.FaultHours, 3), finding.Significant(f.TestedHours, 3))
	if f.Matters == 0 {
		c.Alt = fmt.Sprintf("The effect is %s over the flagged time; flagged for %s of %s hours tested.",
			m.PlusMinus(f.Magnitude, f.Uncertainty, f.UnitOf), finding.Significant(f.FaultHours, 3), finding.Significant(f.TestedHours, 3))
	}
	c.SVG = render(id, c.Title, c.Alt, chartWidth, vg.Length(50+125*len(panels)), func(dc draw.Canvas) { stack(dc, panels, heights) })
	return c
}

// stack draws panels one above the other with their data areas aligned.
func stack(dc draw.Canvas, panels []*plot.Plot, heights []float64) {
	var sum float64
	for _, h := range heights {
		sum += h
	}
	total := dc.Max.Y - dc.Min.Y
	rows := make([][]*plot.Plot, len(panels))
	cells := make([][]draw.Canvas, len(panels))
	y := dc.Max.Y
	left := vg.Length(0)
	for k, p := range panels {
		h := total * vg.Length(heights[k]/sum)
		cell := draw.Crop(dc, 0, -8, y-h-dc.Min.Y+2, y-dc.Max.Y-8)
		rows[k], cells[k] = []*plot.Plot{p}, []draw.Canvas{cell}
		left = max(left, p.DataCanvas(cell).Min.X-cell.Min.X)
		y -= h
	}
	for k, p := range panels {
		cell := cells[k][0]
		own := p.DataCanvas(cell).Min.X - cell.Min.X
		p.Draw(draw.Crop(cell, left-own, 0, 0, 0))
	}
}

type readingGroup struct {
	what, unit string
	roles      []trend.Role
}

// readingGroups sorts the readings of a finding into panels by quantity, at most
// three.
func readingGroups(u *trend.Unit, names []string) []readingGroup {
	var out []readingGroup
	for _, name := range names {
		r, ok := trend.ParseRole(name)
		if !ok || u.Col(r) == nil {
			continue
		}
		what, unit := groupOf(r)
		k := slices.IndexFunc(out, func(g readingGroup) bool { return g.what == what })
		if k < 0 {
			if len(out) == 3 {
				continue
			}
			out = append(out, readingGroup{what: what, unit: unit})
			k = len(out) - 1
		}
		if !slices.Contains(out[k].roles, r) {
			out[k].roles = append(out[k].roles, r)
		}
	}
	return out
}

func groupOf(r trend.Role) (what, unit string) {
	switch r.Kind() {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		return "temperature", "degC"
	case trend.RelHumidity:
		return "humidity", "%"
	case trend.Position, trend.Switch:
		return "command", "fraction"
	}
	return r.Kind().String(), shownUnit(r)
}

// shownUnit is the unit of a role as package finding names it, and rawScale what
// brings the column to it.
func shownUnit(r trend.Role) string {
	switch r.Kind() {
	case trend.RelHumidity:
		return "%"
	case trend.Switch:
		return "fraction"
	case trend.Power:
		return "kW-el"
	}
	return r.Kind().Unit()
}

func rawScale(r trend.Role) float64 {
	if r.Kind() == trend.RelHumidity {
		return 100
	}
	return 1
}

func scaleShift(m finding.Measure, unit string) (scale, shift float64) {
	shift, _ = m.Convert(0, unit)
	return m.Scale(unit), shift
}

func axisLabel(what, unit string, m finding.Measure) string {
	if l := m.Label(unit); l != "" {
		return what + ", " + l
	}
	return what
}

// calendarChart shows when a finding showed: 24 hours up, days along.
func calendarChart(id string, u *trend.Unit, f *finding.Finding, flagged func(i int) bool) chart {
	ax, zone := u.Axis, u.Site.Zone
	c := chart{ID: id, Title: "When it showed", Alt: fmt.Sprintf("Hours of the day by days: flagged for %s hours between %s and %s.",
		finding.Significant(f.FaultHours, 3), f.Start.In(zone).Format("2 January"), f.End.In(zone).Format("2 January"))}
	type cellState struct{ tested, flagged bool }
	first := ax.At(0).In(zone)
	midnight := time.Date(first.Year(), first.Month(), first.Day(), 0, 0, 0, 0, zone)
	cells := map[[2]int]cellState{}
	days := 0
	dayOf := map[string]int{}
	for i := range ax.N {
		at := ax.At(i).In(zone)
		key := at.Format(time.DateOnly)
		d, ok := dayOf[key]
		if !ok {
			d = len(dayOf)
			dayOf[key] = d
			days = d + 1
		}
		if !f.Trace.Applies[i] || math.IsNaN(f.Trace.Effect[i]) {
			continue
		}
		k := [2]int{d, at.Hour()*2 + at.Minute()/30}
		s := cells[k]
		s.tested = true
		s.flagged = s.flagged || flagged(i)
		cells[k] = s
	}
	p := newPlot()
	limits(&p.X, 0, float64(days))
	limits(&p.Y, 0, 24)
	p.Y.Tick.Marker = plot.ConstantTicks{{Value: 0, Label: "00"}, {Value: 6, Label: "06"}, {Value: 12, Label: "12"}, {Value: 18, Label: "18"}, {Value: 24, Label: "24"}}
	p.Y.Label.Text = "hour"
	var xt plot.ConstantTicks
	every := 1
	for _, s := range []int{1, 2, 5, 7, 14, 28} {
		if every = s; days/s <= 12 {
			break
		}
	}
	for d := 0; d <= days; d += every {
		xt = append(xt, plot.Tick{Value: float64(d), Label: midnight.AddDate(0, 0, d).Format("2 Jan")})
	}
	p.X.Tick.Marker = xt
	p.Add(plotFunc(func(dc draw.Canvas, p *plot.Plot) {
		tx, ty := p.Transforms(&dc)
		for d := range days {
			for h := 0; h < 48; {
				s, ok := cells[[2]int{d, h}]
				if !ok {
					h++
					continue
				}
				// Half hours alike are one mark.
				end := h + 1
				for end < 48 && cells[[2]int{d, end}] == s {
					end++
				}
				x0, x1, y0, y1 := tx(float64(d)+0.06), tx(float64(d)+0.94), ty(float64(h)/2), ty(float64(end)/2)
				h = end
				fill := inkTested
				if s.flagged {
					fill = inkEffect
				} else { // thinner, so that print without colour tells them apart
					x0, x1 = x0+(x1-x0)*0.38, x1-(x1-x0)*0.38
				}
				dc.FillPolygon(fill, []vg.Point{{X: x0, Y: y0}, {X: x1, Y: y0}, {X: x1, Y: y1}, {X: x0, Y: y1}})
			}
		}
	}))
	c.Legend = []legendItem{{"flagged (wide)", patch("effect")}, {"tested, nothing flagged (thin)", patch("tested")}}
	c.SVG = render(id, c.Title, c.Alt, chartWidth, 150, func(dc draw.Canvas) { p.Draw(draw.Crop(dc, 0, -6, 0, -8)) })
	return c
}

// plotFunc is a plotter of one function.
type plotFunc func(c draw.Canvas, p *plot.Plot)

func (f plotFunc) Plot(c draw.Canvas, p *plot.Plot) { f(c, p) }

// booksChart shows whether each component's books close: the residual as a dot,
// its uncertainty as a bar, moisture and energy side by side.
func booksChart(id string, rows []balance.Row, k float64, m finding.Measure) (chart, bool) {
	type dot struct{ v, u float64 }
	var names []string
	var moist, energy []dot
	open := 0
	for _, r := range rows {
		if r.MoistureCloses == balance.Untested && r.EnergyCloses == balance.Untested {
			continue
		}
		names = append(names, rowTitle(r))
		md, ed := dot{math.NaN(), 0}, dot{math.NaN(), 0}
		if r.MoistureCloses != balance.Untested {
			md = dot{r.MoistureResidual, k * r.MoistureU}
		}
		if r.EnergyCloses != balance.Untested {
			ed = dot{r.EnergyResidual, k * r.EnergyU}
		}
		if r.MoistureCloses == balance.Open || r.EnergyCloses == balance.Open {
			open++
		}
		moist, energy = append(moist, md), append(energy, ed)
	}
	if len(names) == 0 {
		return chart{}, false
	}
	c := chart{ID: id, Title: "Do the books close", Alt: fmt.Sprintf("Residual and uncertainty of %d accounts; %d do not close.", len(names), open)}
	panel := func(ds []dot, unit, label string, left bool) *plot.Plot {
		p := newPlot()
		reach := 0.1
		scale := m.Scale(unit)
		for _, d := range ds {
			if !math.IsNaN(d.v) {
				reach = math.Max(reach, (math.Abs(d.v)+d.u)*scale)
			}
		}
		limits(&p.X, -1.1*reach, 1.1*reach)
		limits(&p.Y, -0.6, float64(len(names))-0.4)
		p.X.Tick.Marker = fewTicks{}
		p.X.Label.Text = axisLabel(label, unit, m)
		var ticks plot.ConstantTicks
		for i, n := range names {
			if !left {
				n = ""
			}
			ticks = append(ticks, plot.Tick{Value: float64(len(names) - 1 - i), Label: n})
		}
		p.Y.Tick.Marker = ticks
		p.Y.Tick.Length = 0
		p.Add(plotFunc(func(dc draw.Canvas, p *plot.Plot) {
			tx, ty := p.Transforms(&dc)
			dc.StrokeLine2(stroke(inkText, 0.8, nil), tx(0), dc.Min.Y, tx(0), dc.Max.Y)
			for i, d := range ds {
				y := ty(float64(len(names) - 1 - i))
				if math.IsNaN(d.v) {
					sty := p.X.Tick.Label
					sty.XAlign, sty.YAlign = draw.XCenter, draw.YBottom
					dc.FillText(sty, vg.Point{X: tx(0), Y: y + 2}, "not tested")
					continue
				}
				dc.StrokeLine2(stroke(inkEffect, 2, nil), tx((d.v-d.u)*scale), y, tx((d.v+d.u)*scale), y)
				var g draw.GlyphDrawer = draw.CircleGlyph{}
				if math.Abs(d.v) > d.u {
					g = draw.BoxGlyph{}
				}
				dc.DrawGlyph(draw.GlyphStyle{Color: inkEffect, Radius: 4, Shape: g}, vg.Point{X: tx(d.v * scale), Y: y})
			}
		}))
		return p
	}
	left, right := panel(moist, "g/kg", "moisture residual", true), panel(energy, "kJ/kg", "energy residual", false)
	c.SVG = render(id, c.Title, c.Alt, chartWidth, vg.Length(70+30*len(names)), func(dc draw.Canvas) {
		w := dc.Max.X - dc.Min.X
		left.Draw(draw.Crop(dc, 0, -w*0.42, 0, 0))
		right.Draw(draw.Crop(dc, w*0.60, -8, 0, 0))
	})
	c.Legend = []legendItem{{"closes: dot, zero within the bar", swatch("effect", "", `<circle cx="15" cy="6" r="4" style="fill:var(--effect)"/>`)},
		{"open: square, zero outside the bar", swatch("effect", "", `<rect x="11" y="2" width="8" height="8" style="fill:var(--effect)"/>`)}}
	return c, true
}

// fractionChart shows the outdoor-air share against the damper's command: the
// intervals thinned, and the learned curve with its band.
func fractionChart(id string, b *balance.Books, m finding.Measure) (chart, bool) {
	u := b.Unit()
	cmd, parts, curve := b.Command(trend.Mixing), b.Get(balance.Fraction), b.Curve()
	if cmd == nil || len(parts) == 0 || !u.Plant.In(trend.Mixing) {
		return chart{}, false
	}
	settled := b.Settled()
	cloud := func(d *balance.Def) plotter.XYs {
		ps := b.Get(d)
		if len(ps) == 0 {
			return nil
		}
		var at []int
		for i, v := range ps[0].Val {
			if settled[i] && !math.IsNaN(v) && !math.IsNaN(cmd[i]) && v > -0.5 && v < 1.5 {
				at = append(at, i)
			}
		}
		step := max(1, len(at)/500)
		var out plotter.XYs
		for k := 0; k < len(at); k += step {
			out = append(out, plotter.XY{X: 100 * cmd[at[k]], Y: 100 * ps[0].Val[at[k]]})
		}
		return out
	}
	p := newPlot()
	limits(&p.X, -3, 103)
	limits(&p.Y, -25, 125)
	p.X.Tick.Marker, p.Y.Tick.Marker = fewTicks{percent: true}, fewTicks{percent: true}
	p.X.Label.Text, p.Y.Label.Text = "outdoor damper command", "share of outdoor air"
	c := chart{ID: id, Title: "Share of outdoor air against the damper's command", Narrow: true}
	if f := u.Plant.MinOAFraction; !math.IsNaN(f) {
		p.Add(level{y: 100 * f, style: stroke(inkLimit, 1, dashes(5, 3)), label: "required minimum"})
	}
	for _, w := range []struct {
		d     *balance.Def
		what  string
		shape draw.GlyphDrawer
		ink   int
		mark  string
	}{
		{balance.FractionTemp, "by temperature", dotGlyph{}, 0, `<circle cx="15" cy="6" r="2" style="fill:var(--cloud)"/>`},
		{balance.FractionMoisture, "by moisture", draw.CrossGlyph{}, 1, `<path d="M12,3L18,9M12,9L18,3" style="stroke:var(--st-oa);fill:none"/>`},
		{balance.FractionFlow, "by flow", draw.PlusGlyph{}, 2, `<path d="M15,2L15,10M11,6L19,6" style="stroke:var(--st-sa);fill:none"/>`},
	} {
		pts := cloud(w.d)
		if len(pts) == 0 {
			continue
		}
		ink := inkCloud
		switch w.ink {
		case 1:
			ink = inkOA
		case 2:
			ink = inkSA
		}
		p.Add(marks{pts, ink, w.shape, 1.6})
		c.Legend = append(c.Legend, legendItem{w.what, template.HTML(`<svg class="sw" viewBox="0 0 30 12" aria-hidden="true">` + w.mark + `</svg>`)})
	}
	if curve != nil && len(curve.Bins) > 1 {
		var mid, lo, hi plotter.XYs
		for _, bin := range curve.Bins {
			x := 100 * bin.Command
			mid = append(mid, plotter.XY{X: x, Y: 100 * bin.Fraction})
			lo = append(lo, plotter.XY{X: x, Y: 100 * bin.Lo})
			hi = append(hi, plotter.XY{X: x, Y: 100 * bin.Hi})
		}
		p.Add(ribbon{inkBand, []plotter.XYs{lo}, []plotter.XYs{hi}})
		p.Add(strokes{[]plotter.XYs{mid}, stroke(inkEffect, 2, nil)})
		c.Legend = append(c.Legend, legendItem{"learned over " + finding.Significant(curve.FromHours, 3) + " h", swatch("effect", "", "")}, legendItem{"its spread", patch("band")})
		first, last := curve.Bins[0], curve.Bins[len(curve.Bins)-1]
		c.Alt = fmt.Sprintf("At a command of %s the share of outdoor air was %s, at %s it was %s.", m.Value(first.Command, "fraction", 2), m.Value(first.Fraction, "fraction", 2),
			m.Value(last.Command, "fraction", 2), m.Value(last.Fraction, "fraction", 2))
	} else {
		c.Alt = "Share of outdoor air in settled intervals against the command of the outdoor damper."
	}
	c.SVG = render(id, c.Title, c.Alt, chartWidth, 320, func(dc draw.Canvas) { p.Draw(draw.Crop(dc, 0, -8, 0, -6)) })
	return c, true
}

// marks draws many glyphs.
type marks struct {
	pts    plotter.XYs
	ink    interface{ RGBA() (r, g, b, a uint32) }
	shape  draw.GlyphDrawer
	radius vg.Length
}

func (s marks) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	if _, ok := s.shape.(dotGlyph); ok { // all in one path: a tenth of the bytes
		var path vg.Path
		for _, xy := range s.pts {
			x, y := tx(xy.X), ty(xy.Y)
			path.Move(vg.Point{X: x - s.radius/2, Y: y})
			path.Line(vg.Point{X: x + s.radius/2, Y: y})
		}
		c.SetColor(s.ink)
		c.SetLineWidth(s.radius)
		c.SetLineDash(nil, 0)
		c.Stroke(path)
		return
	}
	for _, xy := range s.pts {
		c.DrawGlyph(draw.GlyphStyle{Color: s.ink, Radius: s.radius, Shape: s.shape}, vg.Point{X: tx(xy.X), Y: ty(xy.Y)})
	}
}

// dotGlyph marks a small square dot; see marks.
type dotGlyph struct{}

func (dotGlyph) DrawGlyph(*draw.Canvas, draw.GlyphStyle, vg.Point) {}
