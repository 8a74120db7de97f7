package reports

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"difaudit/dif"
)

// WriteCSV writes the findings, a row for every item of every comparison: UTF-8,
// commas, line feeds. The columns depend on the methods of the plan alone; values that
// do not exist are empty, numbers are in shortest round-trip form. Counts below ten
// are written "<10", a count that would give one away "withheld". The results of an item
// with fewer than ten candidates of a group, or one to nine matched ones, are left empty.
// Text that a spreadsheet would take for a formula begins with an apostrophe.
func WriteCSV(w io.Writer, e *dif.Evidence) error {
	if e == nil {
		return errors.New("write findings: there is no evidence")
	}
	x := expose(e)
	out := csv.NewWriter(w)
	columns := methodColumns(x.plan)
	header := []string{"grouping", "reference", "focal", "item", "version", "role",
		"n_reference", "n_focal", "n_matched_reference", "n_matched_focal",
		"p_reference", "p_focal", "item_rest_correlation_reference", "item_rest_correlation_focal"}
	for _, c := range columns {
		header = append(header, c.method+"."+c.key)
	}
	header = append(header, "class", "computed_class", "basis", "p_value", "reason", "detail", "class_if_corrected", "warnings")
	write := func(record []string) error {
		for i := range record {
			record[i] = harmless(record[i])
		}
		return out.Write(record)
	}
	if err := write(header); err != nil {
		return fmt.Errorf("write findings: %w", err)
	}
	for i := range x.comparisons {
		c := &x.comparisons[i]
		for k := range c.findings {
			if err := write(findingRecord(c, &c.findings[k], columns)); err != nil {
				return fmt.Errorf("write findings: %w", err)
			}
		}
	}
	out.Flush()
	if err := out.Error(); err != nil {
		return fmt.Errorf("write findings: %w", err)
	}
	return nil
}

// methodColumn names one value of one method.
type methodColumn struct{ method, key string }

func methodColumns(p dif.Plan) []methodColumn {
	var out []methodColumn
	for _, m := range dif.Methods() {
		if !slices.Contains(p.Methods, m.ID()) {
			continue
		}
		for _, c := range m.New().Columns() {
			out = append(out, methodColumn{m.ID(), c.Key})
		}
	}
	return out
}

func findingRecord(c *exposedComparison, f *exposedFinding, columns []methodColumn) []string {
	record := []string{c.Grouping, c.Reference, c.Focal, f.Item, f.Version, f.role,
		f.nReference.record(), f.nFocal.record(), f.nMatchedReference.record(), f.nMatchedFocal.record(),
		shortest(f.PReference), shortest(f.PFocal), shortest(f.ItemRest.Reference), shortest(f.ItemRest.Focal)}
	for _, m := range columns {
		record = append(record, shortest(f.value(m.method, m.key)))
	}
	k := f.Classification
	var codes []string
	for _, w := range f.Warnings {
		codes = append(codes, w.Code)
	}
	return append(record, value(k.Class), value(k.ComputedClass), value(k.Basis), shortest(k.PValue),
		value(k.Reason), value(k.Detail), value(k.ClassIfCorrected), strings.Join(codes, " "))
}

// record prints the count for a file: digits only, or why there are none.
func (c count) record() string {
	switch c.hiding {
	case few:
		return "<10"
	case complement:
		return "withheld"
	}
	return fmt.Sprint(c.n)
}

// harmless keeps a spreadsheet from taking a cell for a formula, and the file valid UTF-8.
func harmless(cell string) string {
	cell = strings.ToValidUTF8(cell, "\uFFFD")
	trimmed := strings.TrimLeft(cell, " \u00a0")
	if trimmed == "" || isNumber(cell) {
		return cell
	}
	if strings.ContainsAny(trimmed[:1], "=+-@\t\r\n") || strings.HasPrefix(trimmed, "＝") || strings.HasPrefix(trimmed, "＋") ||
		strings.HasPrefix(trimmed, "－") || strings.HasPrefix(trimmed, "＠") {
		return "'" + cell
	}
	return cell
}

// isNumber reports whether the whole cell is a decimal number.
func isNumber(s string) bool {
	digits := func(t string) (rest string, n int) {
		for n < len(t) && t[n] >= '0' && t[n] <= '9' {
			n++
		}
		return t[n:], n
	}
	s = strings.TrimPrefix(strings.TrimPrefix(s, "-"), "+")
	s, before := digits(s)
	after := 0
	if strings.HasPrefix(s, ".") {
		s, after = digits(s[1:])
	}
	if before+after == 0 {
		return false
	}
	if strings.HasPrefix(s, "e") || strings.HasPrefix(s, "E") {
		s = s[1:]
		if strings.HasPrefix(s, "-") || strings.HasPrefix(s, "+") {
			s = s[1:]
		}
		var n int
		if s, n = digits(s); n == 0 {
			return false
		}
	}
	return s == ""
}
