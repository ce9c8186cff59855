package ingest

import (
	"bytes"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// Limits of the sniffing of a file's head.
const (
	headBytes   = 256 << 10
	headRows    = 400
	maxPreamble = 60       // lines before the header
	maxColumns  = 4096     // of a file
	maxLine     = 1 << 20  // bytes of a line
	maxHeader   = 64 << 10 // bytes of one header cell kept
)

// shape is what the head of a delimited text says about the whole of it.
type shape struct {
	delim    byte
	mark     byte // decimal mark
	crOnly   bool // lines end in CR alone
	header   []string
	units    []string // from brackets or a line of units; "" where there is none
	headLine int      // 1-based line of the header; 0: the file has none
	dataLine int      // 1-based line of the first data row
	timeCol  int
	clockCol int // column of the time of day where the date stands alone; -1
	order    order
	shortOK  bool       // rows leave out blank cells at their end
	long     *longShape // of a narrow file, one row a reading; nil: a column a point
	rows     [][]string // sample of data rows
	width    int        // mean bytes of a line in the sample
}

// sniffText reads the shape of a delimited text from its first bytes. whole says
// that head is the entire text. timeColumn names the column of times; empty: find
// it.
func sniffText(head []byte, whole bool, timeColumn string) (*shape, error) {
	crOnly := bytes.IndexByte(head, '\n') < 0 && bytes.IndexByte(head, '\r') >= 0
	eol := byte('\n')
	if crOnly {
		eol = '\r'
	}
	if bytes.IndexByte(head, 0) >= 0 {
		return nil, fmt.Errorf("holds binary data, not text")
	}
	var lines []string
	size := len(head)
	for len(head) > 0 && len(lines) < maxPreamble+headRows {
		i := bytes.IndexByte(head, eol)
		if i < 0 {
			if !whole {
				break // cut through a line
			}
			i = len(head)
		}
		lines = append(lines, toUTF8(bytes.TrimRight(head[:i], "\r")))
		head = head[min(i+1, len(head)):]
	}
	lines = joinRunOn(lines)
	if len(lines) == 0 && !whole {
		return nil, fmt.Errorf("its first line is longer than %d kB", headBytes>>10)
	}
	blank := true
	for _, l := range lines {
		if strings.TrimSpace(l) != "" {
			blank = false
		}
	}
	if blank {
		return nil, errEmpty
	}
	var best *shape
	score := 0
	for _, d := range []byte{'\t', ';', ',', '|'} {
		s, n := tryDelimiter(lines, d, timeColumn)
		if s != nil && (n > score || (n == score && len(s.header) > len(best.header))) {
			best, score = s, n
		}
	}
	if best == nil {
		return nil, whyNoShape(lines)
	}
	best.crOnly = crOnly
	best.width = max((size-len(head))/max(len(lines), 1), 1)
	return best, nil
}

// joinRunOn puts lines together that a quoted cell runs over. The lines it took in
// are left blank, so that the others keep their numbers.
func joinRunOn(lines []string) []string {
	open := func(s string) bool { // a quote at the start of a cell that does not close, whatever parts the cells
		n := 0
		for _, d := range []byte{',', ';', '\t', '|'} {
			if strings.IndexByte(s, d) < 0 {
				continue
			}
			n++
			if _, _, o := countCells([]byte(s), d); !o {
				return false
			}
		}
		return n > 0
	}
	for i := 0; i < len(lines); i++ {
		if !strings.Contains(lines[i], `"`) || !open(lines[i]) {
			continue
		}
		whole := lines[i]
		for j := i + 1; j < len(lines) && j <= i+maxRunOn; j++ {
			whole += "\n" + lines[j]
			if strings.Contains(lines[j], `"`) && !open(whole) {
				lines[i] = whole
				for k := i + 1; k <= j; k++ {
					lines[k] = ""
				}
				break
			}
		}
	}
	return lines
}

var (
	errEmpty  = fmt.Errorf("the file is empty")
	errNoRows = fmt.Errorf("it has a header and no rows")
	errNoTime = fmt.Errorf("no column of it holds times")
)

func whyNoShape(lines []string) error {
	n := 0
	for _, l := range lines {
		if strings.TrimSpace(l) != "" {
			n++
		}
	}
	if n == 1 {
		return errNoRows
	}
	return errNoTime
}

// tryDelimiter reads the lines with one delimiter and says how many of them
// conform: as many fields as the first data row, and a time where it has one.
func tryDelimiter(lines []string, delim byte, timeColumn string) (*shape, int) {
	rows := make([][]string, len(lines))
	for i, l := range lines {
		if strings.TrimSpace(l) != "" {
			rows[i] = splitLine(l, delim)
		}
	}
	// The first row that holds a time and is followed by another that does (or
	// is the last) begins the data.
	for i := 0; i < len(rows) && i < maxPreamble; i++ {
		r := rows[i]
		if len(r) < 2 || len(r) > maxColumns {
			continue
		}
		for _, tc := range timeCandidates(r) {
			n := 0
			for _, q := range rows[i:] {
				if len(q) == len(r) && isTime(q[tc.col], tc.form) {
					n++
				}
			}
			if n == 0 || (n < 2 && laterRows(rows[i+1:]) > 0) {
				continue
			}
			s := &shape{delim: delim, timeCol: tc.col, clockCol: tc.clock, dataLine: i + 1}
			s.nameColumns(rows, i)
			if timeColumn != "" && !strings.EqualFold(s.header[tc.col], timeColumn) {
				continue
			}
			short := 0
			for _, q := range rows[i:] {
				switch {
				case len(q) == len(r) && len(s.rows) < headRows:
					s.rows = append(s.rows, q)
				case len(q) > 1 && len(q) < len(r):
					short++
				}
			}
			s.shortOK = short > len(s.rows)/10 && short > 2
			s.mark = decimalMark(s.rows, delim, tc.col)
			return s, n
		}
	}
	return nil, 0
}

func laterRows(rows [][]string) int {
	n := 0
	for _, r := range rows {
		if len(r) > 1 {
			n++
		}
	}
	return n
}

type timeCandidate struct {
	col, clock int
	form       stampForm
}

// timeCandidates lists the columns of a data row that could be its time, first
// those that can be nothing else, then counts since 1970.
func timeCandidates(row []string) []timeCandidate {
	var sure, counts []timeCandidate
	for c, v := range row {
		st, ok := parseStamp([]byte(v), orderUnknown)
		if !ok {
			continue
		}
		switch st.form {
		case formDated, formSlashed:
			sure = append(sure, timeCandidate{c, -1, st.form})
		case formDateOnly, formSlashOnly:
			t := timeCandidate{c, -1, st.form}
			for k, w := range row { // the time of day beside it
				if u, ok := parseStamp([]byte(w), orderUnknown); ok && u.form == formTimeOnly && (t.clock < 0 || k == c+1) {
					t.clock = k
				}
			}
			sure = append(sure, t)
		case formEpoch, formSerial:
			counts = append(counts, timeCandidate{c, -1, st.form})
		}
	}
	return append(sure, counts...)
}

func isTime(v string, form stampForm) bool {
	st, ok := parseStamp([]byte(v), orderUnknown)
	if !ok {
		return false
	}
	counted := func(f stampForm) bool { return f == formEpoch || f == formSerial }
	return counted(st.form) == counted(form) && st.form != formTimeOnly
}

// nameColumns finds the header above the first data row, and a line of units
// between the two.
func (s *shape) nameColumns(rows [][]string, first int) {
	width := len(rows[first])
	h := -1
	var unitRow []string
	for j := first - 1; j >= 0; j-- {
		if rows[j] == nil {
			continue
		}
		if len(rows[j]) < 2 && width > 1 {
			break
		}
		if unitRow == nil && isUnitRow(rows[j]) {
			unitRow = rows[j]
			continue
		}
		h = j
		break
	}
	s.header = make([]string, width)
	s.units = make([]string, width)
	for c := range width {
		name := ""
		if h >= 0 && c < len(rows[h]) {
			name = strings.Join(strings.Fields(rows[h][c]), " ") // a header may run over lines
		}
		if len(name) > maxHeader {
			name = name[:maxHeader]
		}
		if name == "" {
			name = fmt.Sprintf("column %d", c+1)
		}
		s.header[c] = name
		if _, u := splitHeaderUnit(name); u != "" {
			s.units[c] = u
		} else if c < len(unitRow) {
			if u := strings.Trim(strings.TrimSpace(unitRow[c]), "[]()"); knownUnit(u) {
				s.units[c] = u
			}
		}
	}
	if h >= 0 {
		s.headLine = h + 1
	}
}

// isUnitRow reports whether a row between header and data holds units of
// measure: at least two cells that are, and none that could be a name.
func isUnitRow(row []string) bool {
	n := 0
	for i, v := range row {
		v = strings.Trim(strings.TrimSpace(v), "[]()")
		switch {
		case knownUnit(v) && len(v) < 12:
			n++
		case v == "" || v == "-" || i == 0:
		case strings.EqualFold(v, "on/off"), strings.EqualFold(v, "bool"), strings.EqualFold(v, "boolean"), strings.EqualFold(v, "n/a"), strings.EqualFold(v, "none"), strings.EqualFold(v, "no units"):
		default:
			return false
		}
	}
	return n >= 2
}

func knownUnit(s string) bool {
	if s == "" {
		return false
	}
	_, ok := LookupUnit(s)
	return ok
}

// splitHeaderUnit parts "SAT [degF]" into name and unit. The unit need not be a
// known one.
func splitHeaderUnit(h string) (name, unit string) {
	h = strings.TrimSpace(h)
	for _, p := range [...][2]string{{"[", "]"}, {"(", ")"}, {"{", "}"}} {
		if !strings.HasSuffix(h, p[1]) {
			continue
		}
		i := strings.LastIndex(h, p[0])
		if i <= 0 {
			continue
		}
		u := strings.TrimSpace(h[i+1 : len(h)-1])
		if knownUnit(u) || (p[0] == "[" && u != "" && len(u) < 16) {
			return strings.TrimSpace(h[:i]), u
		}
	}
	if i := strings.LastIndexAny(h, ",/ _"); i > 0 { // "SAT, °F", "SAT °F", "sa_temp_degF"
		u := strings.TrimSpace(h[i+1:])
		if x, ok := LookupUnit(u); ok && len(u) > 1 && strings.ContainsAny(u, "°%/²³") || ok && plainUnitWord(foldUnit(u), x) {
			return strings.TrimRight(strings.TrimSpace(h[:i]), ",_ "), u
		}
	}
	return h, ""
}

// plainUnitWord reports whether a bare last word of a header can only be its
// unit: "degF", "cfm", "kPa"; not "F", "in", "m", "h", "s", "ratio".
func plainUnitWord(folded string, u Measure) bool {
	switch u.Dim {
	case Length, Area, Duration, Ratio:
		return folded == "percent" || folded == "pct" || folded == "%" || folded == "prozent"
	}
	return len(folded) >= 2 && folded != "ton" && folded != "unit" && folded != "ls"
}

// decimalMark judges from the sample which mark parts whole from fraction.
func decimalMark(rows [][]string, delim byte, timeCol int) byte {
	if delim == ',' {
		// A comma inside a quoted cell is still possible.
		commas, dots := countMarks(rows, timeCol)
		if commas > 0 && dots == 0 {
			return ','
		}
		return '.'
	}
	commas, dots := countMarks(rows, timeCol)
	if commas > dots {
		return ','
	}
	return '.'
}

func countMarks(rows [][]string, timeCol int) (commas, dots int) {
	for _, r := range rows {
		for c, v := range r {
			if c == timeCol {
				continue
			}
			v = strings.TrimSpace(v)
			if v == "" || !(isDigit(v[0]) || v[0] == '-' || v[0] == '+') || !isDigit(v[len(v)-1]) {
				continue
			}
			i, j := strings.LastIndexByte(v, ','), strings.LastIndexByte(v, '.')
			switch {
			case i > j:
				if j < 0 && groups3([]byte(strings.TrimLeft(v, "+-")), ',') {
					continue // 1,234 says nothing
				}
				commas++
			case j > i:
				if i < 0 && groups3([]byte(strings.TrimLeft(v, "+-")), '.') && strings.Count(v, ".") > 1 {
					continue
				}
				dots++
			}
		}
	}
	return commas, dots
}

// splitLine parts a line into cells; a cell may be quoted, a doubled quote in it
// is one. A line is a record: a quote left open ends with it.
func splitLine(l string, delim byte) []string {
	var out []string
	for {
		t := strings.TrimLeft(l, " ")
		if strings.HasPrefix(t, `"`) {
			var b strings.Builder
			t = t[1:]
			for {
				i := strings.IndexByte(t, '"')
				if i < 0 {
					b.WriteString(t)
					t = ""
					break
				}
				b.WriteString(t[:i])
				t = t[i+1:]
				if !strings.HasPrefix(t, `"`) {
					break
				}
				b.WriteByte('"')
				t = t[1:]
			}
			out = append(out, b.String())
			i := strings.IndexByte(t, delim)
			if i < 0 {
				return out
			}
			l = t[i+1:]
			continue
		}
		i := strings.IndexByte(l, delim)
		if i < 0 {
			return append(out, strings.TrimSpace(l))
		}
		out = append(out, strings.TrimSpace(l[:i]))
		l = l[i+1:]
	}
}

// toUTF8 takes text that is not UTF-8 for ISO 8859-1, in which a degree sign is
// one byte.
func toUTF8(b []byte) string {
	if utf8.Valid(b) {
		return string(b)
	}
	r := make([]rune, len(b))
	for i, c := range b {
		r[i] = rune(c)
	}
	return string(r)
}

// readHead reads up to n bytes and says whether that was all.
func readHead(r io.Reader, n int) (head []byte, whole bool, err error) {
	head = make([]byte, n)
	m, err := io.ReadFull(r, head)
	switch err {
	case io.EOF, io.ErrUnexpectedEOF:
		return head[:m], true, nil
	case nil:
		return head, false, nil
	}
	return head[:m], false, err
}
