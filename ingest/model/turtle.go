package model

import (
	"net/url"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Limits on what a stranger's model may ask for.
const (
	maxTriples = 2_000_000
	maxNested  = 100
)

// term is a node of a graph: an IRI, a blank node ("_:b1") or a literal.
type term struct {
	text    string
	literal bool
}

type triple struct{ s, p, o term }

const (
	rdfType  = "http://www.w3.org/1999/02/22-rdf-syntax-ns#type"
	rdfFirst = "http://www.w3.org/1999/02/22-rdf-syntax-ns#first"
	rdfRest  = "http://www.w3.org/1999/02/22-rdf-syntax-ns#rest"
	rdfNil   = "http://www.w3.org/1999/02/22-rdf-syntax-ns#nil"
)

// turtle reads RDF 1.1 Turtle (W3C Recommendation 25 February 2014). IRIs are not
// checked.
type turtle struct {
	in       string
	i, line  int
	base     string
	prefixes map[string]string
	blanks   int
	depth    int
	out      []triple
}

func readTurtle(text string) ([]triple, error) {
	if !utf8.ValidString(text) {
		return nil, errorf(0, "a Turtle file is UTF-8, and this is not")
	}
	t := &turtle{in: strings.TrimPrefix(text, "\ufeff"), line: 1, prefixes: map[string]string{}}
	for {
		t.space()
		if t.i >= len(t.in) {
			return t.out, nil
		}
		if err := t.statement(); err != nil {
			return nil, err
		}
	}
}

func (t *turtle) peek() byte {
	if t.i < len(t.in) {
		return t.in[t.i]
	}
	return 0
}

// space skips blanks and comments.
func (t *turtle) space() {
	for t.i < len(t.in) {
		switch c := t.in[t.i]; c {
		case '\n':
			t.line++
			t.i++
		case ' ', '\t', '\r':
			t.i++
		case '#':
			for t.i < len(t.in) && t.in[t.i] != '\n' {
				t.i++
			}
		default:
			return
		}
	}
}

func (t *turtle) fail(format string, args ...any) error { return errorf(t.line, format, args...) }

func (t *turtle) expect(c byte) error {
	t.space()
	if t.peek() != c {
		return t.fail("%s is expected, and there is %s", strconv.Quote(string(c)), t.here())
	}
	t.i++
	return nil
}

// here is what stands at the place, for messages.
func (t *turtle) here() string {
	if t.i >= len(t.in) {
		return "the end of the file"
	}
	end := t.i
	for end < len(t.in) && end < t.i+20 && t.in[end] != '\n' {
		end++
	}
	return strconv.Quote(strings.ToValidUTF8(t.in[t.i:end], ""))
}

// keyword reads a directive's word where it stands.
func (t *turtle) keyword(w string) bool {
	if len(t.in)-t.i >= len(w) && strings.EqualFold(t.in[t.i:t.i+len(w)], w) {
		if end := t.i + len(w); end < len(t.in) && strings.ContainsRune(" \t\r\n<", rune(t.in[end])) {
			t.i = end
			return true
		}
	}
	return false
}

func (t *turtle) statement() error {
	switch {
	case t.keyword("@prefix"):
		if err := t.prefix(); err != nil {
			return err
		}
		return t.expect('.')
	case t.keyword("prefix"):
		return t.prefix()
	case strings.HasPrefix(t.in[t.i:], "@base") && t.keyword("@base"), t.keyword("base"):
		dotted := t.i >= 5 && t.in[t.i-5] == '@'
		t.space()
		iri, err := t.iri()
		if err != nil {
			return err
		}
		t.base = iri
		if dotted {
			return t.expect('.')
		}
		return nil
	}
	var s term
	var err error
	if t.peek() == '[' {
		if s, err = t.blank(); err != nil {
			return err
		}
		if t.space(); t.peek() == '.' {
			t.i++
			return nil
		}
	} else if s, err = t.subject(); err != nil {
		return err
	}
	if err := t.properties(s); err != nil {
		return err
	}
	return t.expect('.')
}

func (t *turtle) prefix() error {
	t.space()
	end := strings.IndexByte(t.in[t.i:], ':')
	if end < 0 || strings.ContainsAny(t.in[t.i:t.i+end], " \n\t<") {
		return t.fail("a prefix ends with a colon")
	}
	name := t.in[t.i : t.i+end]
	t.i += end + 1
	t.space()
	iri, err := t.iri()
	if err != nil {
		return err
	}
	t.prefixes[name] = iri
	return nil
}

// iri reads <...>.
func (t *turtle) iri() (string, error) {
	if t.peek() != '<' {
		return "", t.fail("an IRI in <> is expected, and there is %s", t.here())
	}
	end := strings.IndexAny(t.in[t.i:], ">\n")
	if end < 0 || t.in[t.i+end] != '>' {
		return "", t.fail("an IRI does not end with >")
	}
	s := t.in[t.i+1 : t.i+end]
	t.i += end + 1
	if strings.Contains(s, `\`) {
		s = unescape(s)
	}
	return t.resolve(s), nil
}

// resolve puts a relative IRI behind the base (RFC 3986, section 5.2).
func (t *turtle) resolve(iri string) string {
	ref, err := url.Parse(iri)
	if t.base == "" || err != nil || ref.IsAbs() {
		return iri
	}
	base, err := url.Parse(t.base)
	if err != nil || base.Opaque != "" {
		return iri
	}
	out := base.ResolveReference(ref).String()
	if strings.HasSuffix(iri, "#") && !strings.HasSuffix(out, "#") {
		out += "#" // an empty fragment, on which a prefix builds
	}
	return out
}

func (t *turtle) subject() (term, error) {
	switch t.peek() {
	case '<':
		s, err := t.iri()
		return term{text: s}, err
	case '(':
		return t.list()
	}
	return t.name()
}

// name reads prefix:local or _:label.
func (t *turtle) name() (term, error) {
	start := t.i
	for t.i < len(t.in) {
		r, n := utf8.DecodeRuneInString(t.in[t.i:])
		if r == '\\' && t.i+1 < len(t.in) { // an escaped mark of a local name
			t.i += 2
			continue
		}
		if !(unicode.IsLetter(r) || unicode.IsDigit(r) || strings.ContainsRune("_-:.%", r) || unicode.Is(unicode.Mn, r)) {
			break
		}
		t.i += n
	}
	for t.i > start && t.in[t.i-1] == '.' { // the full stop ends the statement
		t.i--
	}
	s := t.in[start:t.i]
	pre, local, ok := strings.Cut(s, ":")
	if !ok {
		t.i = start
		return term{}, t.fail("a name with a prefix is expected, and there is %s", t.here())
	}
	if pre == "_" {
		return term{text: s}, nil
	}
	iri, ok := t.prefixes[pre]
	if !ok {
		return term{}, t.fail("the prefix %s is not declared", strconv.Quote(pre))
	}
	if strings.Contains(local, `\`) {
		var b strings.Builder
		for i := 0; i < len(local); i++ {
			if local[i] == '\\' && i+1 < len(local) {
				i++
			}
			b.WriteByte(local[i])
		}
		local = b.String()
	}
	return term{text: iri + local}, nil
}

func (t *turtle) properties(s term) error {
	for {
		t.space()
		var p term
		if c := t.peek(); c == 'a' && t.i+1 < len(t.in) && strings.ContainsRune(" \t\r\n<[\"", rune(t.in[t.i+1])) {
			t.i++
			p = term{text: rdfType}
		} else if c == '<' {
			iri, err := t.iri()
			if err != nil {
				return err
			}
			p = term{text: iri}
		} else {
			var err error
			if p, err = t.name(); err != nil {
				return err
			}
		}
		for {
			o, err := t.object()
			if err != nil {
				return err
			}
			if err := t.add(s, p, o); err != nil {
				return err
			}
			if t.space(); t.peek() != ',' {
				break
			}
			t.i++
		}
		if t.peek() != ';' {
			return nil
		}
		for t.peek() == ';' {
			t.i++
			t.space()
		}
		if c := t.peek(); c == '.' || c == ']' || c == 0 {
			return nil
		}
	}
}

func (t *turtle) add(s, p, o term) error {
	if len(t.out) >= maxTriples {
		return t.fail("the model has more than %d statements", maxTriples)
	}
	t.out = append(t.out, triple{s, p, o})
	return nil
}

func (t *turtle) object() (term, error) {
	t.space()
	switch c := t.peek(); {
	case c == '<':
		s, err := t.iri()
		return term{text: s}, err
	case c == '[':
		return t.blank()
	case c == '(':
		return t.list()
	case c == '"' || c == '\'':
		return t.literal(c)
	case c >= '0' && c <= '9' || c == '+' || c == '-' || c == '.':
		start := t.i
		for t.i < len(t.in) && strings.IndexByte("0123456789+-.eE", t.in[t.i]) >= 0 {
			t.i++
		}
		for t.i > start && t.in[t.i-1] == '.' {
			t.i--
		}
		if t.i == start {
			return term{}, t.fail("a value is expected, and there is %s", t.here())
		}
		return term{text: t.in[start:t.i], literal: true}, nil
	}
	for _, w := range []string{"true", "false"} {
		if strings.HasPrefix(t.in[t.i:], w) {
			if end := t.i + len(w); end >= len(t.in) || strings.IndexByte(" \t\r\n.;,])", t.in[end]) >= 0 {
				t.i = end
				return term{text: w, literal: true}, nil
			}
		}
	}
	return t.name()
}

func (t *turtle) literal(q byte) (term, error) {
	mark := string(q)
	long := strings.HasPrefix(t.in[t.i:], strings.Repeat(mark, 3))
	if long {
		mark = strings.Repeat(mark, 3)
	}
	t.i += len(mark)
	start, escaped := t.i, false
	for {
		if t.i >= len(t.in) || !long && t.in[t.i] == '\n' {
			return term{}, t.fail("a text does not end with %s", mark)
		}
		if t.in[t.i] == '\\' {
			escaped = true
			t.i = min(t.i+2, len(t.in))
			continue
		}
		if strings.HasPrefix(t.in[t.i:], mark) {
			break
		}
		if t.in[t.i] == '\n' {
			t.line++
		}
		t.i++
	}
	s := t.in[start:t.i]
	t.i += len(mark)
	if escaped {
		s = unescape(s)
	}
	switch {
	case t.peek() == '@': // language
		for t.i++; t.i < len(t.in) && (t.in[t.i] == '-' || t.in[t.i] >= 'a' && t.in[t.i] <= 'z' || t.in[t.i] >= 'A' && t.in[t.i] <= 'Z' || t.in[t.i] >= '0' && t.in[t.i] <= '9'); t.i++ {
		}
	case strings.HasPrefix(t.in[t.i:], "^^"):
		t.i += 2
		if _, err := t.subject(); err != nil {
			return term{}, err
		}
	}
	return term{text: s, literal: true}, nil
}

func (t *turtle) nest() error {
	if t.depth++; t.depth > maxNested {
		return t.fail("brackets are nested more than %d deep", maxNested)
	}
	return nil
}

func (t *turtle) newBlank() term {
	t.blanks++
	return term{text: "_: " + strconv.Itoa(t.blanks)} // no label has a blank in it
}

func (t *turtle) blank() (term, error) {
	if err := t.nest(); err != nil {
		return term{}, err
	}
	defer func() { t.depth-- }()
	t.i++
	b := t.newBlank()
	t.space()
	if t.peek() != ']' {
		if err := t.properties(b); err != nil {
			return term{}, err
		}
	}
	return b, t.expect(']')
}

func (t *turtle) list() (term, error) {
	if err := t.nest(); err != nil {
		return term{}, err
	}
	defer func() { t.depth-- }()
	t.i++
	head := term{text: rdfNil}
	var last term
	for {
		t.space()
		if t.peek() == ')' {
			t.i++
			if last.text != "" {
				return head, t.add(last, term{text: rdfRest}, term{text: rdfNil})
			}
			return head, nil
		}
		if t.i >= len(t.in) {
			return head, t.fail("a list does not end with )")
		}
		o, err := t.object()
		if err != nil {
			return head, err
		}
		cell := t.newBlank()
		if last.text == "" {
			head = cell
		} else if err := t.add(last, term{text: rdfRest}, cell); err != nil {
			return head, err
		}
		if err := t.add(cell, term{text: rdfFirst}, o); err != nil {
			return head, err
		}
		last = cell
	}
}

// unescape resolves \n, \", \u00E9 and the like; what it does not know it leaves.
func unescape(s string) string {
	var b strings.Builder
	for i := 0; i < len(s); i++ {
		if s[i] != '\\' || i+1 >= len(s) {
			b.WriteByte(s[i])
			continue
		}
		i++
		switch s[i] {
		case 'n':
			b.WriteByte('\n')
		case 't':
			b.WriteByte('\t')
		case 'r':
			b.WriteByte('\r')
		case 'b':
			b.WriteByte('\b')
		case 'f':
			b.WriteByte('\f')
		case 'u', 'U':
			n := 4
			if s[i] == 'U' {
				n = 8
			}
			if i+n < len(s)+0 && i+1+n <= len(s) {
				if v, err := strconv.ParseUint(s[i+1:i+1+n], 16, 32); err == nil {
					b.WriteRune(rune(v))
					i += n
					continue
				}
			}
			b.WriteByte('\\')
			b.WriteByte(s[i])
		default:
			b.WriteByte(s[i])
		}
	}
	return b.String()
}
