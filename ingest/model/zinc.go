package model

import (
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// zinc reads Zinc 2.0 and 3.0 grids (Project Haystack, Zinc grammar). Markers, texts
// and references are kept; of other values only that they are there.
type zinc struct {
	in      string
	i, line int
	depth   int
}

// readZinc reads the one grid of a file.
func readZinc(text string) (grid, error) {
	if !utf8.ValidString(text) {
		return nil, errorf(0, "a Zinc file is UTF-8, and this is not")
	}
	z := &zinc{in: strings.ReplaceAll(strings.TrimPrefix(text, "\ufeff"), "\r\n", "\n"), line: 1}
	return z.grid()
}

func (z *zinc) fail(format string, args ...any) error { return errorf(z.line, format, args...) }

func (z *zinc) peek() byte {
	if z.i < len(z.in) {
		return z.in[z.i]
	}
	return 0
}

func (z *zinc) blanks() {
	for z.peek() == ' ' || z.peek() == '\t' {
		z.i++
	}
}

// end takes a line's end; false where there is something else.
func (z *zinc) end() bool {
	z.blanks()
	if z.i >= len(z.in) {
		return true
	}
	if z.peek() == '\n' {
		z.i++
		z.line++
		return true
	}
	return false
}

func (z *zinc) ident() string {
	start := z.i
	for z.i < len(z.in) && (z.in[z.i] == '_' || z.in[z.i] < 0x80 && (unicode.IsLetter(rune(z.in[z.i])) || unicode.IsDigit(rune(z.in[z.i])))) {
		z.i++
	}
	return z.in[start:z.i]
}

func (z *zinc) grid() (grid, error) {
	if !strings.HasPrefix(z.in[z.i:], "ver:") {
		return nil, z.fail("a Zinc grid begins with ver:\"3.0\"")
	}
	z.i += len("ver:")
	if _, err := z.value(); err != nil {
		return nil, err
	}
	if err := z.meta(); err != nil {
		return nil, err
	}
	if !z.end() {
		return nil, z.fail("the first line has something after its tags")
	}
	var cols []string
	for {
		z.blanks()
		name := z.ident()
		if name == "" {
			return nil, z.fail("the name of a column is expected")
		}
		cols = append(cols, name)
		if err := z.meta(); err != nil {
			return nil, err
		}
		z.blanks()
		if z.peek() == ',' {
			z.i++
			continue
		}
		if !z.end() {
			return nil, z.fail("the line of columns has something after %s", strconv.Quote(name))
		}
		break
	}
	var g grid
	for z.i < len(z.in) && !strings.HasPrefix(z.in[z.i:], ">>") {
		if z.peek() == '\n' { // a blank line ends the grid
			z.i++
			z.line++
			if strings.TrimSpace(z.in[z.i:]) == "" || z.depth > 0 {
				break
			}
			continue
		}
		e := entity{}
		for c := 0; ; c++ {
			z.blanks()
			if b := z.peek(); b != ',' && b != '\n' && b != 0 {
				v, err := z.value()
				if err != nil {
					return nil, err
				}
				if c >= len(cols) {
					return nil, z.fail("the row has more cells than the %d columns", len(cols))
				}
				if v.kind != other || v.text != "" {
					e[cols[c]] = v
				}
			}
			z.blanks()
			if z.peek() == ',' {
				z.i++
				continue
			}
			break
		}
		if !z.end() && !strings.HasPrefix(z.in[z.i:], ">>") {
			return nil, z.fail("a comma or the end of the line is expected")
		}
		if len(e) > 0 {
			g = append(g, e)
		}
	}
	return g, nil
}

// meta reads the tags after the version or a column's name.
func (z *zinc) meta() error {
	for {
		save := z.i
		z.blanks()
		if z.ident() == "" {
			z.i = save
			return nil
		}
		if z.peek() == ':' {
			z.i++
			if _, err := z.value(); err != nil {
				return err
			}
		}
	}
}

func (z *zinc) value() (value, error) {
	switch c := z.peek(); {
	case c == '"':
		s, err := z.text('"')
		return value{kind: str, text: s}, err
	case c == '`':
		_, err := z.text('`')
		return value{text: "uri"}, err
	case c == '@':
		z.i++
		start := z.i
		for z.i < len(z.in) && (strings.IndexByte("_:-.~", z.in[z.i]) >= 0 || z.in[z.i] < 0x80 && (unicode.IsLetter(rune(z.in[z.i])) || unicode.IsDigit(rune(z.in[z.i])))) {
			z.i++
		}
		v := value{kind: ref, text: z.in[start:z.i]}
		if strings.HasPrefix(z.in[z.i:], ` "`) {
			z.i++
			dis, err := z.text('"')
			if err != nil {
				return v, err
			}
			v.dis = dis
		}
		return v, nil
	case c == '[':
		return value{text: "list"}, z.bracketed('[', ']')
	case c == '{':
		return value{text: "dict"}, z.bracketed('{', '}')
	case strings.HasPrefix(z.in[z.i:], "<<"):
		if z.depth++; z.depth > maxNested {
			return value{}, z.fail("grids are nested more than %d deep", maxNested)
		}
		z.i += 2
		for z.peek() == '\n' || z.peek() == ' ' {
			if z.peek() == '\n' {
				z.line++
			}
			z.i++
		}
		if _, err := z.grid(); err != nil {
			return value{}, err
		}
		z.depth--
		for z.peek() == '\n' || z.peek() == ' ' {
			if z.peek() == '\n' {
				z.line++
			}
			z.i++
		}
		if !strings.HasPrefix(z.in[z.i:], ">>") {
			return value{}, z.fail("a nested grid does not end with >>")
		}
		z.i += 2
		return value{text: "grid"}, nil
	}
	// A word or a number: up to what parts cells.
	start := z.i
	for z.i < len(z.in) && strings.IndexByte(",\n \t[]{}<>\"", z.in[z.i]) < 0 {
		if z.in[z.i] == '(' { // C(37.5,-77.4), Bin("text/plain")
			end := strings.IndexAny(z.in[z.i:], ")\n")
			if end < 0 || z.in[z.i+end] != ')' {
				return value{}, z.fail("a bracket does not close")
			}
			z.i += end
		}
		z.i++
	}
	w := z.in[start:z.i]
	switch w {
	case "M", "✓":
		return value{kind: marker}, nil
	case "N", "R", "NA":
		return value{}, nil
	case "":
		return value{}, z.fail("a value is expected")
	}
	if strings.Contains(w, "T") && z.peek() == ' ' && len(w) > 15 { // a time's zone: 2026-05-01T10:00:00Z UTC
		save := z.i
		z.i++
		if z.ident() == "" {
			z.i = save
		}
	}
	return value{text: w}, nil
}

func (z *zinc) text(q byte) (string, error) {
	z.i++
	start, escaped := z.i, false
	for z.i < len(z.in) && z.in[z.i] != q {
		if z.in[z.i] == '\n' {
			return "", z.fail("a text does not end in its line")
		}
		if z.in[z.i] == '\\' {
			escaped = true
			z.i++
		}
		z.i++
	}
	if z.i >= len(z.in) {
		return "", z.fail("a text does not end")
	}
	s := z.in[start:z.i]
	z.i++
	if escaped {
		s = unescape(s)
	}
	return s, nil
}

// bracketed passes over a list or a dict.
func (z *zinc) bracketed(open, shut byte) error {
	depth := 0
	for z.i < len(z.in) {
		switch c := z.in[z.i]; c {
		case '"':
			if _, err := z.text('"'); err != nil {
				return err
			}
			continue
		case '\n':
			z.line++
		case open:
			depth++
		case shut:
			if depth--; depth == 0 {
				z.i++
				return nil
			}
		}
		z.i++
	}
	return z.fail("%s does not close", strconv.Quote(string(open)))
}

// ReadZinc reads the points of a Haystack model in Zinc.
func ReadZinc(text string) ([]Point, error) {
	g, err := readZinc(text)
	if err != nil {
		return nil, err
	}
	return pointsOf(g)
}

func pointsOf(g grid) ([]Point, error) {
	out := haystackPoints(g)
	if len(out) == 0 {
		return nil, errorf(0, "it has no entity with the tag point")
	}
	return out, nil
}

// WriteZinc writes points as a Haystack model in Zinc 3.0. What has no tags in the
// standard is left out and named in the grid's doc.
func WriteZinc(w io.Writer, site string, points []Point) error {
	g, without := makeGrid(points)
	cols := g.columns()
	var b strings.Builder
	fmt.Fprintf(&b, "ver:\"3.0\" dis:%s", quoteZinc(site))
	if len(without) > 0 {
		fmt.Fprintf(&b, " doc:%s", quoteZinc(leftOut(without)))
	}
	b.WriteByte('\n')
	b.WriteString(strings.Join(cols, ",") + "\n")
	for _, e := range g {
		for i, c := range cols {
			if i > 0 {
				b.WriteByte(',')
			}
			switch v := e[c]; v.kind {
			case marker:
				b.WriteByte('M')
			case str:
				b.WriteString(quoteZinc(v.text))
			case ref:
				b.WriteString("@" + v.text)
			}
		}
		b.WriteByte('\n')
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func leftOut(points []Point) string {
	var list []string
	for _, p := range points {
		list = append(list, fmt.Sprintf("%s of %s (%s)", p.Column, p.Unit, p.Role))
	}
	return "no tags for " + strings.Join(list, ", ")
}

func quoteZinc(s string) string { return strings.ReplaceAll(quoteTurtle(s), "$", `\$`) }
