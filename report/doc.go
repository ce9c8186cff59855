// Package report writes what a run concludes: a page for people, logs for
// machines. Pages are self-contained HTML with charts inlined as SVG; no script
// is needed, nothing is fetched, and the same input gives the same bytes. Text
// that came from strangers' files is escaped wherever it goes.
package report
