package report

import (
	"bytes"
	"fmt"
	"html/template"
	"image/color"
	"regexp"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// ink is a colour that the page's style sheet decides, so that one chart serves
// light, dark and print. On the canvas it is a token colour; in the SVG it
// becomes a CSS variable of the same name.
type ink struct {
	name  string
	token color.NRGBA
}

var inks []ink

func newInk(name string) color.Color {
	k := uint8(len(inks) + 1)
	c := color.NRGBA{R: 0xA0 + k%8, G: 0x10 + k/8, B: 0x30 + k, A: 255}
	inks = append(inks, ink{name, c})
	return c
}

// The inks. Each has its value in html/style.css, light and dark.
var (
	inkText   = newInk("ink")
	inkRule   = newInk("rule")
	inkBand   = newInk("band")
	inkFlag   = newInk("flag")
	inkEffect = newInk("effect")
	inkLimit  = newInk("limit")
	inkTested = newInk("tested")
	inkCloud  = newInk("cloud")
	inkOA     = newInk("st-oa")
	inkRA     = newInk("st-ra")
	inkMA     = newInk("st-ma")
	inkPH     = newInk("st-ph")
	inkCC     = newInk("st-cc")
	inkHC     = newInk("st-hc")
	inkSA     = newInk("st-sa")
	inkCmd    = newInk("cmd")
)

var svgColour = regexp.MustCompile(`#[0-9A-F]{6}`)

var inkByHex = func() map[string]string {
	m := map[string]string{"#000000": "var(--ink)"}
	for _, k := range inks {
		m[fmt.Sprintf("#%02X%02X%02X", k.token.R, k.token.G, k.token.B)] = "var(--" + k.name + ")"
	}
	return m
}()

// chart is a figure of the page.
type chart struct {
	ID     string
	Title  string
	Alt    string // one sentence that states what it shows
	SVG    template.HTML
	Legend []legendItem
	Narrow bool // does not need the full width
}

type legendItem struct {
	Label string
	Mark  template.HTML // a small inline SVG
}

const (
	chartWidth = 760 * vg.Length(1)
	fontSize   = vg.Length(9.5)
)

// render draws on an SVG canvas and makes it fit for inlining: no prolog, no
// namespaces, colours as variables, size by the page.
func render(id, title, alt string, w, h vg.Length, paint func(c draw.Canvas)) template.HTML {
	canvas := vgsvg.NewWith(vgsvg.UseWH(w, h))
	paint(draw.New(canvas))
	var b bytes.Buffer
	if _, err := canvas.WriteTo(&b); err != nil {
		panic("report: writing to memory failed: " + err.Error())
	}
	s := b.String()
	s = s[strings.Index(s, "<svg"):]
	s = s[strings.Index(s, ">")+1:]
	s = strings.TrimSpace(s)
	s = svgColour.ReplaceAllStringFunc(s, func(hex string) string {
		if v, ok := inkByHex[hex]; ok {
			return v
		}
		return hex
	})
	s = fontStyle.ReplaceAllString(s, `style="font-size:${1}px$2"`)
	s = strings.ReplaceAll(s, "\n\tstyle", " style")
	head := fmt.Sprintf(`<svg viewBox="0 0 %g %g" role="img" aria-labelledby="%s-t %s-d"><title id="%s-t">%s</title><desc id="%s-d">%s</desc>`,
		w.Points(), h.Points(), id, id, id, template.HTMLEscapeString(title), id, template.HTMLEscapeString(alt))
	return template.HTML(head + s)
}

var fontStyle = regexp.MustCompile(`style="font-family:[^;]*;font-variant:normal;font-weight:normal;font-style:normal;font-size:([0-9.]+)px([^"]*)"`)

// swatch is a line with its dash and mark, for a legend.
func swatch(name string, dash string, glyph string) template.HTML {
	line := fmt.Sprintf(`<line x1="0" y1="6" x2="30" y2="6" style="stroke:var(--%s);stroke-width:2" stroke-dasharray="%s"/>`, name, dash)
	return template.HTML(`<svg class="sw" viewBox="0 0 30 12" aria-hidden="true">` + line + glyph + `</svg>`)
}

func patch(name string) template.HTML {
	return template.HTML(fmt.Sprintf(`<svg class="sw" viewBox="0 0 30 12" aria-hidden="true"><rect x="0" y="1" width="30" height="10" style="fill:var(--%s);stroke:var(--ink);stroke-width:.5"/></svg>`, name))
}
