package report

import (
	"fmt"
	"html/template"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"dewledger/ingest/trend"
	"dewledger/psy"
	"dewledger/rules/balance"
	"dewledger/rules/finding"
)

// meanState is a station's mean over some intervals, with the ellipse of its
// expanded uncertainty: standard uncertainties of T and W and their correlation,
// since a humidity from RH moves with the thermometer beside it.
type meanState struct {
	station trend.Station
	t, w    float64
	ut, uw  float64
	rho     float64
	n       int
}

func meanOf(b *balance.Books, s trend.Station, where []bool) (meanState, bool) {
	t, w := b.Temp(s), b.HumRatio(s)
	if t == nil || w == nil {
		return meanState{}, false
	}
	keep := make([]bool, len(where))
	n := 0
	for i := range keep {
		keep[i] = where[i] && !math.IsNaN(t.Val[i]) && !math.IsNaN(w.Val[i])
		if keep[i] {
			n++
		}
	}
	if n == 0 {
		return meanState{}, false
	}
	mt, mw := t.Mean(0, len(keep), keep), w.Mean(0, len(keep), keep)
	mean := func(g *balance.Term) float64 {
		var sum float64
		for i, k := range keep {
			if k {
				sum += g.At(i)
			}
		}
		return sum / float64(n)
	}
	var cov float64
	for i := range t.Terms {
		for j := range w.Terms {
			if a, c := &t.Terms[i], &w.Terms[j]; a.Role == c.Role && a.Role != trend.NoRole {
				cov += mean(a) * mean(c)
			}
		}
	}
	m := meanState{station: s, t: mt.Val, w: mw.Val, ut: mt.U(), uw: mw.U(), n: n}
	if m.ut > 0 && m.uw > 0 {
		m.rho = math.Min(math.Max(cov/(m.ut*m.uw), -0.99), 0.99)
	}
	return m, true
}

// ellipse is the curve at k standard uncertainties.
func (m meanState) ellipse(k float64) []plotter.XY {
	var out []plotter.XY
	for a := 0; a <= 40; a++ {
		x, y := math.Cos(2*math.Pi*float64(a)/40), math.Sin(2*math.Pi*float64(a)/40)
		out = append(out, plotter.XY{X: m.t + k*m.ut*x, Y: m.w + k*m.uw*(m.rho*x+math.Sqrt(1-m.rho*m.rho)*y)})
	}
	return out
}

// psychroChart shows the air path at the site's pressure in the operating state
// that the unit spent most hours in: the stations' mean states with their
// uncertainty, joined in the order of the train, over a thinned cloud.
func psychroChart(id string, b *balance.Books, k float64, m finding.Measure) (chart, bool) {
	u := b.Unit()
	states, settled := b.States(), b.Settled()
	var hours [balance.NumStates]int
	for i, s := range states {
		if settled[i] {
			hours[s]++
		}
	}
	best := balance.Unknown
	for s := balance.Heating; s < balance.NumStates; s++ {
		if hours[s] > hours[best] {
			best = s
		}
	}
	if hours[best] == 0 {
		return chart{}, false
	}
	where := make([]bool, u.Axis.N)
	for i := range where {
		where[i] = settled[i] && states[i] == best
	}
	var means []meanState
	for _, s := range []trend.Station{trend.Outdoor, trend.Return, trend.Mixed, trend.AfterCooling, trend.Supply} {
		if x, ok := meanOf(b, s, where); ok {
			means = append(means, x)
		}
	}
	if len(means) < 2 {
		return chart{}, false
	}
	air := b.Air()
	c := chart{ID: id, Title: "The air path while " + stateInWords(best),
		Alt: fmt.Sprintf("Psychrometric chart at %s with the mean states over %s settled hours while %s.", m.Value(air.P/1000, "kPa", 4),
			finding.Significant(float64(hours[best])*u.Axis.Hours(), 3), stateInWords(best))}

	lo, hi, top := math.Inf(1), math.Inf(-1), 0.0
	var cloud plotter.XYs
	tIn := func(t float64) float64 { x, _ := m.Convert(t, "degC"); return x }
	wIn := func(w float64) float64 { x, _ := m.Convert(w, "kg/kg"); return x }
	for _, x := range means {
		lo, hi, top = math.Min(lo, x.t-2*x.ut), math.Max(hi, x.t+2*x.ut), math.Max(top, x.w+2*x.uw)
	}
	for _, s := range []trend.Station{trend.Outdoor, trend.Supply} {
		t, w := b.Temp(s), b.HumRatio(s)
		if t == nil || w == nil {
			continue
		}
		step := max(1, u.Axis.N/700)
		for i := 0; i < u.Axis.N; i += step {
			if where[i] && !math.IsNaN(t.Val[i]) && w.Val[i] >= 0 {
				cloud = append(cloud, plotter.XY{X: t.Val[i], Y: w.Val[i]})
				lo, hi, top = math.Min(lo, t.Val[i]), math.Max(hi, t.Val[i]), math.Max(top, w.Val[i])
			}
		}
	}
	lo, hi = math.Max(math.Floor(lo/5)*5-2, -55), math.Min(math.Ceil(hi/5)*5+4, 85)
	top = math.Min(top*1.15+0.001, 0.2)

	p := newPlot()
	limits(&p.X, tIn(lo), tIn(hi))
	limits(&p.Y, 0, wIn(top))
	p.X.Tick.Marker, p.Y.Tick.Marker = fewTicks{}, fewTicks{}
	p.X.Label.Text, p.Y.Label.Text = axisLabel("dry bulb", "degC", m), axisLabel("moisture", "kg/kg", m)
	p.Add(psychroGrid{air: air, lo: lo, hi: hi, top: top, t: tIn, w: wIn, measure: m})
	for i := range cloud {
		cloud[i] = plotter.XY{X: tIn(cloud[i].X), Y: wIn(cloud[i].Y)}
	}
	p.Add(marks{cloud, inkCloud, dotGlyph{}, 1.4})

	p.Add(plotFunc(func(dc draw.Canvas, p *plot.Plot) {
		tx, ty := p.Transforms(&dc)
		at := func(x, y float64) vg.Point { return vg.Point{X: tx(tIn(x)), Y: ty(wIn(y))} }
		// Mixing joins its streams; then the path follows the train.
		var path []meanState
		byStation := map[trend.Station]meanState{}
		for _, x := range means {
			byStation[x.station] = x
		}
		o, haveO := byStation[trend.Outdoor]
		r, haveR := byStation[trend.Return]
		if haveO && haveR && u.Plant.In(trend.Mixing) {
			dc.StrokeLines(stroke(inkText, 0.7, dashes(3, 3)), []vg.Point{at(o.t, o.w), at(r.t, r.w)})
		}
		if haveO && !u.Plant.In(trend.Mixing) {
			path = append(path, o)
		} else if x, ok := byStation[trend.Mixed]; ok {
			path = append(path, x)
		} else if t, w := b.MixtureTemp(), b.MixtureHumRatio(); t != nil && w != nil {
			mt, mw := t.Mean(0, u.Axis.N, where), w.Mean(0, u.Axis.N, where)
			if mt.N > 0 && mw.N > 0 {
				path = append(path, meanState{t: mt.Val, w: mw.Val})
			}
		}
		for _, s := range []trend.Station{trend.AfterCooling, trend.Supply} {
			if x, ok := byStation[s]; ok {
				path = append(path, x)
			}
		}
		for i := 1; i < len(path); i++ {
			dc.StrokeLine2(stroke(inkText, 1.4, nil), tx(tIn(path[i-1].t)), ty(wIn(path[i-1].w)), tx(tIn(path[i].t)), ty(wIn(path[i].w)))
		}
		for _, x := range means {
			l := stationLine[x.station]
			var pts []vg.Point
			for _, xy := range x.ellipse(k) {
				pts = append(pts, at(xy.X, xy.Y))
			}
			dc.StrokeLines(stroke(l.ink, 1.2, nil), dc.ClipLinesXY(pts)...)
			dc.DrawGlyph(draw.GlyphStyle{Color: l.ink, Radius: 4.5, Shape: l.shape}, at(x.t, x.w))
			sty := p.X.Tick.Label
			sty.Color, sty.XAlign, sty.YAlign = inkText, draw.XLeft, draw.YBottom
			dc.FillText(sty, vg.Point{X: at(x.t, x.w).X + 6, Y: at(x.t, x.w).Y + 4}, x.station.Title())
		}
	}))
	for _, x := range means {
		l := stationLine[x.station]
		c.Legend = append(c.Legend, legendItem{x.station.Title() + ", ± at k = " + fmt.Sprint(k), swatch(l.name, "", string(glyphSVG(l.shape, l.name)))})
	}
	c.Legend = append(c.Legend, legendItem{"single intervals, thinned", template.HTML(`<svg class="sw" viewBox="0 0 30 12" aria-hidden="true"><circle cx="9" cy="5" r="1.5" style="fill:var(--cloud)"/><circle cx="19" cy="8" r="1.5" style="fill:var(--cloud)"/></svg>`)})
	c.SVG = render(id, c.Title, c.Alt, chartWidth, 430, func(dc draw.Canvas) { p.Draw(draw.Crop(dc, 0, -8, 0, -6)) })
	return c, true
}

// glyphSVG is a station's mark for a legend.
func glyphSVG(g draw.GlyphDrawer, name string) template.HTML {
	fill := fmt.Sprintf(`style="fill:var(--%s)"`, name)
	line := fmt.Sprintf(`style="stroke:var(--%s);fill:none;stroke-width:1.5"`, name)
	switch g.(type) {
	case draw.TriangleGlyph:
		return template.HTML(`<path d="M15,1L20,10L10,10Z" ` + line + `/>`)
	case draw.PyramidGlyph:
		return template.HTML(`<path d="M15,1L20,10L10,10Z" ` + fill + `/>`)
	case draw.SquareGlyph:
		return template.HTML(`<rect x="11" y="2" width="8" height="8" ` + line + `/>`)
	case draw.BoxGlyph:
		return template.HTML(`<rect x="11" y="2" width="8" height="8" ` + fill + `/>`)
	case draw.RingGlyph:
		return template.HTML(`<circle cx="15" cy="6" r="4" ` + line + `/>`)
	case draw.CrossGlyph:
		return template.HTML(`<path d="M11,2L19,10M11,10L19,2" ` + line + `/>`)
	case draw.PlusGlyph:
		return template.HTML(`<path d="M15,1L15,11M10,6L20,6" ` + line + `/>`)
	}
	return template.HTML(`<circle cx="15" cy="6" r="4" ` + fill + `/>`)
}

// psychroGrid draws saturation, lines of relative humidity, of wet bulb and of
// enthalpy.
type psychroGrid struct {
	air         psy.Model
	lo, hi, top float64
	t, w        func(float64) float64
	measure     finding.Measure
}

func (g psychroGrid) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	curve := func(style draw.LineStyle, w func(t float64) float64) (last vg.Point, ok bool) {
		var pts []vg.Point
		for i := 0; i <= 120; i++ {
			t := g.lo + (g.hi-g.lo)*float64(i)/120
			x := w(t)
			if math.IsNaN(x) || x < 0 || x > 3*g.top {
				continue
			}
			pt := vg.Point{X: tx(g.t(t)), Y: ty(g.w(x))}
			pts = append(pts, pt)
			if x <= g.top {
				last, ok = pt, true
			}
		}
		c.StrokeLines(style, c.ClipLinesXY(pts)...)
		return last, ok
	}
	label := func(at vg.Point, s string, xa, ya float64) {
		sty := p.X.Tick.Label
		sty.Font.Size = 8
		sty.XAlign, sty.YAlign = draw.XAlignment(xa), draw.YAlignment(ya)
		c.FillText(sty, at, s)
	}
	for _, rh := range []float64{0.2, 0.4, 0.6, 0.8} {
		if at, ok := curve(stroke(inkRule, 0.8, nil), func(t float64) float64 { return g.air.HumRatio(t, rh) }); ok {
			label(vg.Point{X: at.X - 2, Y: at.Y}, fmt.Sprintf("%.0f %%", 100*rh), -1, 0)
		}
	}
	// Wet bulb: straight enough to need few points; enthalpy nearly parallel.
	for tw := math.Ceil(g.lo/5) * 5; tw < g.hi; tw += 5 {
		curve(stroke(inkRule, 0.5, dashes(2, 3)), func(t float64) float64 {
			if t < tw {
				return math.NaN()
			}
			return g.air.HumRatioWetBulb(t, tw)
		})
	}
	for h := -50.0; h < 150; h += 10 {
		curve(stroke(inkRule, 0.4, nil), func(t float64) float64 {
			w := g.air.HumRatioEnthalpy(t, h)
			if w > g.air.SatHumRatio(t) {
				return math.NaN()
			}
			return w
		})
	}
	if at, ok := curve(stroke(inkText, 1.4, nil), g.air.SatHumRatio); ok {
		label(vg.Point{X: at.X - 4, Y: at.Y - 2}, "saturation", -1, 0)
	}
}
