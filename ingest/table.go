package ingest

import (
	"strings"

	"dewledger/ingest/trend"
)

// rawTable is what was read of one file, before units and alignment.
type rawTable struct {
	parts   []rawPart
	zoned   bool     // the stamps are UTC, else what the local clock showed
	unit    []string // unit that the cells themselves carry, by slot
	rows    int      // data rows used
	pruned  bool     // no row group of it lies in the period
	skipped map[string]int
	notes   notebook
}

// rawPart is columns that share their stamps: all of a wide file's, or one point of
// a long one.
type rawPart struct {
	slots []int // of the columns wanted
	ms    []int64
	cols  [][]float64 // missing cells by missing(reason)
}

// want is a column to be read.
type want struct {
	col    int
	status int  // column that says how good the reading is; -1: none
	output bool // a command or a setpoint: overridden, it is still what the equipment got

	quantity bool // a number by nature: words for on and off are no value of it
}

// Reasons for which a row is left out.
const (
	skipRagged  = "ragged"
	skipBadTime = "bad time"
	skipTooLong = "line too long"
	skipHeader  = "repeated header"
	skipUnnamed = "no such point"
)

func (t *rawTable) skip(why string) {
	if t.skipped == nil {
		t.skipped = make(map[string]int)
	}
	t.skipped[why]++
}

// Words by which an export says how good a reading is. Any that stands in a status
// text counts; where none does, the reading is good. Those of the standards are
// BACnet's reliability and status flags (ISO 16484-5) and OPC's quality; the others
// are common practice, no source.
var statusWords = []struct {
	word string
	why  trend.Reason
}{
	{"overrid", trend.Overridden}, {"manual", trend.Overridden}, {"operator", trend.Overridden}, {"forced", trend.Overridden}, {"hand", trend.Overridden}, {"substitut", trend.Overridden}, {"manuel", trend.Overridden},
	{"out of service", trend.Disabled}, {"out-of-service", trend.Disabled}, {"outofservice", trend.Disabled}, {"disabled", trend.Disabled}, {"deaktiviert", trend.Disabled},
	{"stale", trend.Stale}, {"old data", trend.Stale}, {"expired", trend.Stale}, {"last known", trend.Stale},
	{"down", trend.Down}, {"offline", trend.Down}, {"off-line", trend.Down}, {"unreachable", trend.Down}, {"no comm", trend.Down}, {"comm fail", trend.Down}, {"comm loss", trend.Down}, {"comm error", trend.Down}, {"communication", trend.Down}, {"i/o timeout", trend.Down}, {"i/o fail", trend.Down}, {"disconnect", trend.Down}, {"timeout", trend.Down}, {"not connected", trend.Down},
	{"fault", trend.BadQuality}, {"fail", trend.BadQuality}, {"bad", trend.BadQuality}, {"error", trend.BadQuality}, {"invalid", trend.BadQuality}, {"unreliable", trend.BadQuality}, {"uncertain", trend.BadQuality}, {"questionable", trend.BadQuality},
	{"over range", trend.BadQuality}, {"under range", trend.BadQuality}, {"over_range", trend.BadQuality}, {"under_range", trend.BadQuality}, {"open loop", trend.BadQuality}, {"shorted", trend.BadQuality}, {"no sensor", trend.BadQuality}, {"gestört", trend.BadQuality}, {"störung", trend.BadQuality}, {"défaut", trend.BadQuality}, {"fallo", trend.BadQuality},
	{"null", trend.Gap}, {"no data", trend.Gap}, {"missing", trend.Gap},
}

// Words with which a status says that the reading is good, though a word above
// stands in them.
var goodStatus = []string{"no fault", "not in fault", "no_fault_detected", "no error", "no alarm", "not overridden", "fault-free", "fault free"}

// Parts of statuses that say that the reading is good.
var fineWords = []string{"ok", "good", "normal", "valid", "fine", "alarm", "auto", "active", "enabled", "online", "reliable", "ack", "gut", "bon", "correct", "none"}

// quality reads a status. known is false for a text that says nothing known; the
// reading is then taken for good.
func quality(text string) (why trend.Reason, known bool) {
	low := strings.ToLower(strings.Trim(strings.TrimSpace(text), "{}[]()<>"))
	if low == "" || low == "-" {
		return trend.Present, true
	}
	if _, good := opcQuality(low); good {
		return trend.Present, true
	}
	for _, w := range goodStatus {
		low = strings.ReplaceAll(low, w, "ok")
	}
	for _, w := range statusWords {
		if strings.Contains(low, w.word) {
			return w.why, true
		}
	}
	for _, w := range strings.FieldsFunc(low, func(r rune) bool { return strings.ContainsRune(" ,;|/:_-", r) }) {
		for _, f := range fineWords {
			if w == f {
				return trend.Present, true
			}
		}
	}
	if opc, good := opcQuality(low); opc && !good {
		return trend.BadQuality, true
	}
	return trend.Present, false
}

// opcQuality reads the quality byte of OPC exports: its two high bits are 11 where
// the reading is good. Source: OPC Data Access 2.05, quality flags (from memory).
func opcQuality(s string) (is, good bool) {
	if len(s) != 3 && s != "64" || strings.Trim(s, "0123456789") != "" {
		return false, false
	}
	n := 0
	for _, c := range []byte(s) {
		n = n*10 + int(c-'0')
	}
	return n <= 255, n >= 192 && n <= 255
}
