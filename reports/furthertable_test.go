package reports

import (
	"slices"
	"strings"
	"testing"

	"difaudit/dif"
)

// A p-value names its statistic, and stands in the same table, however narrow the page.
func TestPValuesStandBesideTheirStatistics(t *testing.T) {
	t.Parallel()
	for _, corrected := range []bool{false, true} {
		e := verbal(t, func(p *dif.Plan) { p.Criteria.ContinuityCorrection = corrected })
		for i := range e.Comparisons[0].Items {
			e.Comparisons[0].Items[i].Warnings = nil // show Breslow-Day and Tarone too
		}
		r := &report{document: newDocument("", "", reportOptions.Date, nil), x: expose(e), options: reportOptions}
		r.addPage(false)
		columns := r.furtherColumns(&r.x.comparisons[0])
		var heads []string
		for i, c := range columns {
			heads = append(heads, c.column.head)
			if c.column.head == "p" {
				t.Errorf("column %d is headed p alone", i)
			}
		}
		for _, want := range []string{"B-D p", "Tarone p", "trend p"} {
			if !slices.Contains(heads, want) {
				t.Errorf("no column %q among %v", want, heads)
			}
		}
		for width := 10.0; width < 250; width += 3 {
			for rest := columns; len(rest) > 0; {
				n := columnsThatFit(rest, width)
				if n < 1 {
					t.Fatal("a table takes no column")
				}
				rest = rest[n:]
				if len(rest) > 0 && (strings.HasSuffix(rest[0].column.head, " p") && rest[0].column.head != "exact p" || rest[0].column.head == "df") {
					t.Fatalf("width %v: %q begins a table", width, rest[0].column.head)
				}
			}
		}
	}
}
