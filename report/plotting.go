package report

import (
	"fmt"
	"image/color"
	"math"
	"time"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"dewledger/ingest/trend"
)

// line is how one reading is drawn, the same on every chart: a colour, a dash, a
// mark.
type line struct {
	ink   color.Color
	name  string // CSS variable
	dash  []vg.Length
	css   string // the same dash for a legend
	shape draw.GlyphDrawer
}

var stationLine = map[trend.Station]line{
	trend.Outdoor:      {inkOA, "st-oa", nil, "", draw.TriangleGlyph{}},
	trend.Recovered:    {inkOA, "st-oa", dashes(6, 2, 1, 2), "6,2,1,2", draw.PyramidGlyph{}},
	trend.Return:       {inkRA, "st-ra", dashes(6, 3), "6,3", draw.SquareGlyph{}},
	trend.Mixed:        {inkMA, "st-ma", dashes(2, 2), "2,2", draw.RingGlyph{}},
	trend.AfterPreheat: {inkPH, "st-ph", dashes(8, 2, 2, 2), "8,2,2,2", draw.PlusGlyph{}},
	trend.AfterCooling: {inkCC, "st-cc", dashes(4, 2), "4,2", draw.CrossGlyph{}},
	trend.AfterHeating: {inkHC, "st-hc", dashes(1, 2), "1,2", draw.BoxGlyph{}},
	trend.Supply:       {inkSA, "st-sa", nil, "", draw.CircleGlyph{}},
	trend.Weather:      {inkOA, "st-oa", dashes(1, 3), "1,3", draw.TriangleGlyph{}},
}

func dashes(d ...float64) []vg.Length {
	out := make([]vg.Length, len(d))
	for i, x := range d {
		out[i] = vg.Length(x)
	}
	return out
}

// lineOf is the line of a role: its station's, or one of the commands'.
func lineOf(r trend.Role, nth int) line {
	if l, ok := stationLine[r.Station()]; ok && r.Kind() != trend.Position {
		return l
	}
	commands := [][]vg.Length{nil, dashes(6, 3), dashes(2, 2), dashes(8, 2, 2, 2)}
	css := []string{"", "6,3", "2,2", "8,2,2,2"}
	k := nth % len(commands)
	return line{inkCmd, "cmd", commands[k], css[k], draw.CircleGlyph{}}
}

// newPlot is a plot in the page's manner: thin axes, no box, a faint grid.
func newPlot() *plot.Plot {
	p := plot.New()
	p.BackgroundColor = nil
	for _, a := range []*plot.Axis{&p.X, &p.Y} {
		a.Tick.Label.Font.Size = fontSize
		a.Label.TextStyle.Font.Size = fontSize
		a.LineStyle.Width = 0.6
		a.Tick.LineStyle.Width = 0.6
		a.Tick.Length = 4
		a.Padding = 3
		a.Tick.Label.Color = inkText
		a.Label.TextStyle.Color = inkText
		a.Color = inkText
		a.Tick.LineStyle.Color = inkText
	}
	g := plotter.NewGrid()
	g.Vertical.Color, g.Horizontal.Color = inkRule, inkRule
	g.Vertical.Width, g.Horizontal.Width = 0.4, 0.4
	g.Vertical.Dashes, g.Horizontal.Dashes = nil, nil
	p.Add(g)
	return p
}

// limits sets an axis so that it is never NaN, empty or inverted: such an axis
// would make the plot hang.
func limits(a *plot.Axis, lo, hi float64) {
	if math.IsNaN(lo) || math.IsNaN(hi) || math.IsInf(lo, 0) || math.IsInf(hi, 0) {
		lo, hi = 0, 1
	}
	if hi-lo < 1e-9*math.Max(1, math.Abs(hi)) {
		lo, hi = lo-0.5, hi+0.5
	}
	a.Min, a.Max = lo, hi
}

// timeTicks marks local midnights, with dates at sensible steps.
type timeTicks struct {
	zone *time.Location
}

func (t timeTicks) Ticks(lo, hi float64) []plot.Tick {
	from, to := time.Unix(int64(lo), 0).In(t.zone), time.Unix(int64(hi), 0).In(t.zone)
	span := to.Sub(from)
	var out []plot.Tick
	if span <= 60*time.Hour { // hours
		step := 1
		for _, s := range []int{1, 2, 3, 6, 12} {
			step = s
			if span/time.Duration(s)/time.Hour <= 12 {
				break
			}
		}
		for d := time.Date(from.Year(), from.Month(), from.Day(), 0, 0, 0, 0, t.zone); !d.After(to); d = d.Add(time.Hour) {
			if d.Before(from) || d.Hour()%step != 0 {
				continue
			}
			label := d.Format("15:04")
			if d.Hour() == 0 {
				label = d.Format("2 Jan")
			}
			out = append(out, plot.Tick{Value: float64(d.Unix()), Label: label})
		}
		return out
	}
	days := int(span.Hours()/24) + 1
	every := 1
	for _, s := range []int{1, 2, 5, 7, 14, 28, 56, 91, 182} {
		every = s
		if days/s <= 12 {
			break
		}
	}
	n := 0
	for d := time.Date(from.Year(), from.Month(), from.Day(), 0, 0, 0, 0, t.zone); !d.After(to); d = d.AddDate(0, 0, 1) {
		if d.Before(from) {
			continue
		}
		switch {
		case n%every == 0:
			out = append(out, plot.Tick{Value: float64(d.Unix()), Label: d.Format("2 Jan")})
		case every <= 14:
			out = append(out, plot.Tick{Value: float64(d.Unix())})
		}
		n++
	}
	return out
}

// fewTicks marks round values, at most about six.
type fewTicks struct{ percent bool }

func (f fewTicks) Ticks(lo, hi float64) []plot.Tick {
	raw := (hi - lo) / 5
	mag := math.Pow(10, math.Floor(math.Log10(raw)))
	step := 10 * mag
	for _, m := range []float64{1, 2, 2.5, 5} {
		if m*mag >= raw {
			step = m * mag
			break
		}
	}
	d := 0
	for x := step; d < 6 && math.Abs(x-math.Round(x)) > 1e-6; x *= 10 {
		d++
	}
	var out []plot.Tick
	for v := math.Ceil(lo/step-1e-9) * step; v <= hi+1e-9*step; v += step {
		s := fmt.Sprintf("%.*f", d, v)
		if s == "-0" || math.Abs(v) < 1e-12 {
			s = fmt.Sprintf("%.*f", d, 0.0)
		}
		if s[0] == '-' {
			s = "−" + s[1:]
		}
		if f.percent {
			s += " %"
		}
		out = append(out, plot.Tick{Value: v, Label: s})
	}
	return out
}

// columns is how many pixel columns a full-width line is reduced to.
const columns = 640

// reduced breaks a series at its gaps and keeps, of each pixel column, the
// minimum and the maximum in their order.
func reduced(ax trend.Axis, v []float64, i0, i1 int, scale, shift float64) []plotter.XYs {
	return reducedTo(columns, ax, v, i0, i1, scale, shift)
}

func reducedTo(cols int, ax trend.Axis, v []float64, i0, i1 int, scale, shift float64) []plotter.XYs {
	n := i1 - i0
	per := max(1, (n+cols-1)/cols)
	var out []plotter.XYs
	var cur plotter.XYs
	at := func(i int) float64 { return float64(ax.At(i).Unix()) + ax.Step.Seconds()/2 }
	flush := func() {
		if len(cur) > 0 {
			out = append(out, cur)
			cur = nil
		}
	}
	for c := i0; c < i1; c += per {
		lo, hi := -1, -1
		for i := c; i < min(c+per, i1); i++ {
			if math.IsNaN(v[i]) {
				continue
			}
			if lo < 0 || v[i] < v[lo] {
				lo = i
			}
			if hi < 0 || v[i] > v[hi] {
				hi = i
			}
		}
		if lo < 0 {
			flush()
			continue
		}
		a, b := min(lo, hi), max(lo, hi)
		cur = append(cur, plotter.XY{X: at(a), Y: v[a]*scale + shift})
		if b != a {
			cur = append(cur, plotter.XY{X: at(b), Y: v[b]*scale + shift})
		}
	}
	flush()
	return out
}

// strokes draws polylines, single points included.
type strokes struct {
	parts []plotter.XYs
	style draw.LineStyle
}

func (s strokes) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	for _, part := range s.parts {
		pts := make([]vg.Point, 0, len(part)+1)
		for _, xy := range part {
			pts = append(pts, vg.Point{X: tx(xy.X), Y: ty(xy.Y)})
		}
		if len(pts) == 1 {
			pts = append(pts, vg.Point{X: pts[0].X + 0.8, Y: pts[0].Y})
		}
		c.StrokeLines(s.style, c.ClipLinesXY(pts)...)
	}
}

func stroke(ink color.Color, width vg.Length, dash []vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: ink, Width: width, Dashes: dash}
}

// shades fills vertical stretches over the whole height.
type shades struct {
	ink   color.Color
	spans [][2]float64
}

func (s shades) Plot(c draw.Canvas, p *plot.Plot) {
	tx, _ := p.Transforms(&c)
	for _, sp := range s.spans {
		x0, x1 := tx(math.Max(sp[0], p.X.Min)), tx(math.Min(sp[1], p.X.Max))
		if x1 < c.Min.X || x0 > c.Max.X {
			continue
		}
		if x1-x0 < 0.7 {
			x1 = x0 + 0.7
		}
		c.FillPolygon(s.ink, []vg.Point{{X: x0, Y: c.Min.Y}, {X: x1, Y: c.Min.Y}, {X: x1, Y: c.Max.Y}, {X: x0, Y: c.Max.Y}})
	}
}

// ribbon fills between a lower and an upper line.
type ribbon struct {
	ink    color.Color
	lo, hi []plotter.XYs
}

func (r ribbon) Plot(c draw.Canvas, p *plot.Plot) {
	tx, ty := p.Transforms(&c)
	clampY := func(y vg.Length) vg.Length {
		return vg.Length(math.Min(math.Max(float64(y), float64(c.Min.Y)), float64(c.Max.Y)))
	}
	for k := range r.lo {
		if k >= len(r.hi) {
			return
		}
		var pts []vg.Point
		for _, xy := range r.hi[k] {
			pts = append(pts, vg.Point{X: tx(xy.X), Y: clampY(ty(xy.Y))})
		}
		for i := len(r.lo[k]) - 1; i >= 0; i-- {
			pts = append(pts, vg.Point{X: tx(r.lo[k][i].X), Y: clampY(ty(r.lo[k][i].Y))})
		}
		if len(pts) >= 3 {
			c.FillPolygon(r.ink, pts)
		}
	}
}

// level is a horizontal line with its label at the left end.
type level struct {
	y     float64
	style draw.LineStyle
	label string
}

func (l level) Plot(c draw.Canvas, p *plot.Plot) {
	if l.y < p.Y.Min || l.y > p.Y.Max {
		return
	}
	_, ty := p.Transforms(&c)
	y := ty(l.y)
	c.StrokeLine2(l.style, c.Min.X, y, c.Max.X, y)
	if l.label != "" {
		sty := p.X.Tick.Label
		sty.XAlign, sty.YAlign = draw.XLeft, draw.YBottom
		c.FillText(sty, vg.Point{X: c.Min.X + 3, Y: y + 1.5}, l.label)
	}
}

// spread is the range of a column between two intervals, by quantile so that one
// wild sample does not flatten the rest; NaN without values.
func spread(v []float64, i0, i1 int) (lo, hi float64) {
	s := make([]float64, 0, i1-i0)
	for _, x := range v[i0:i1] {
		if !math.IsNaN(x) && !math.IsInf(x, 0) {
			s = append(s, x)
		}
	}
	if len(s) == 0 {
		return math.NaN(), math.NaN()
	}
	lo, hi = quantiles(s, 0.002, 0.998)
	return lo, hi
}
