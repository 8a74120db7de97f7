package reports

import (
	"errors"
	"fmt"
	"io"
	"time"

	"difaudit/dif"
)

// Options are the facts of a report that do not stand in the evidence.
type Options struct {
	// Date is the date of the report, of which the day in UTC counts. It must be set.
	Date time.Time
	// EvidenceSHA256 is the digest of the bytes of the evidence, in hexadecimal digits.
	// It is printed so that a reader can tell which evidence the report shows.
	EvidenceSHA256 string
}

// WritePDF writes the report of an audit: what was audited, who was counted, how, and
// what was found for every item of every comparison. Counts of fewer than ten
// candidates of a group and the results that rest on them are withheld. Equal evidence
// and options give equal bytes. Nothing is written when an error is returned.
func WritePDF(w io.Writer, e *dif.Evidence, o Options) error {
	if e == nil {
		return errors.New("write report: there is no evidence")
	}
	if o.Date.IsZero() {
		return errors.New("write report: the options give no report date")
	}
	b, err := renderReport(e, o)
	if err != nil {
		return fmt.Errorf("write report: %w", err)
	}
	if _, err := w.Write(b); err != nil {
		return fmt.Errorf("write report: %w", err)
	}
	return nil
}

// renderReport writes the document twice, since the first page names pages and counts
// that are only known at the end. The PDF writer panics on input it cannot take; that
// becomes an error.
func renderReport(e *dif.Evidence, o Options) (b []byte, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			err = fmt.Errorf("the PDF writer stopped: %v", fault)
		}
	}()
	r := &report{x: expose(e), options: o}
	r.options.Date = o.Date.UTC().Truncate(24 * time.Hour)
	first := r.write(nil)
	return r.write(first).bytes()
}

// report writes the sections of an audit report.
type report struct {
	*document
	x             *exposed
	options       Options
	contentsShown bool // on the first page
	altered       int  // texts with replaced characters, known the second time
}

func (r *report) title() string { return shortenRunes(r.x.plan.Title, 300) }

func shortenRunes(s string, most int) string {
	if runes := []rune(s); len(runes) > most {
		return string(runes[:most]) + "…"
	}
	return s
}

func (r *report) write(first *document) *document {
	r.document = newDocument(r.title(), "evidence "+shortDigest(r.options.EvidenceSHA256), r.options.Date, first)
	if first != nil {
		r.altered = len(first.text.altered)
	}
	r.frontPage()
	r.countedSection()
	r.methodSection()
	for i := range r.x.comparisons {
		r.comparisonSection(i, &r.x.comparisons[i])
	}
	r.limitsSection()
	return r.document
}

// shortDigest is the beginning of a digest, enough to tell reports apart.
func shortDigest(digest string) string {
	if digest == "" {
		return "digest not given"
	}
	if len(digest) > 12 {
		return digest[:12]
	}
	return digest
}

// Titles of the sections; the comparisons stand between methods and limits.
const (
	titleCounted = "Who was counted"
	titleMethods = "How the items were compared"
	titleLimits  = "What was not tested, cautions and verification"
)

func comparisonTitle(i int, c *exposedComparison) string {
	return fmt.Sprintf("Comparison %d: %s, %s against %s", i+1, shortenRunes(c.Grouping, 60), shortenRunes(c.Focal, 60), shortenRunes(c.Reference, 60))
}
