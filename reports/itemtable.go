package reports

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// mainColumn is a column of the table of findings that comes from a method.
type mainColumn struct {
	method string
	keys   []string // of the values it shows
	column tableColumn
	text   func(f *exposedFinding, c dif.Criteria) string
}

// mainColumns are the statistics every reader looks for; the others stand in the table
// of further statistics.
func mainColumns(c dif.Criteria) []mainColumn {
	const mh, std = "mantel_haenszel", "standardization"
	chi, p := "chi_square", "p_value"
	if c.ContinuityCorrection {
		chi, p = "chi_square_corrected", "p_value_corrected"
	}
	plainValue := func(method, key string, decimals int) func(*exposedFinding, dif.Criteria) string {
		return func(f *exposedFinding, _ dif.Criteria) string { return fixed(f.value(method, key), decimals) }
	}
	return []mainColumn{
		{mh, []string{"delta", "log_odds_ratio"}, tableColumn{"D-DIF", 15, alignRight},
			func(f *exposedFinding, _ dif.Criteria) string { return dDIF(f.value(mh, "delta")) }},
		{mh, []string{"delta_se", "log_odds_ratio_se"}, tableColumn{"SE", 11, alignRight}, plainValue(mh, "delta_se", 2)},
		{mh, []string{"delta_low", "delta_high"}, tableColumn{"95 % interval", 28, alignRight},
			func(f *exposedFinding, _ dif.Criteria) string {
				low, high := f.value(mh, "delta_low"), f.value(mh, "delta_high")
				if low == nil || high == nil {
					return missing
				}
				return dDIF(low) + " to " + dDIF(high)
			}},
		{mh, []string{chi}, tableColumn{"χ²", 15, alignRight}, plainValue(mh, chi, 2)},
		{mh, []string{p}, tableColumn{"p", 14, alignRight},
			func(f *exposedFinding, c dif.Criteria) string { return probability(f.value(mh, p), c.ClassAlpha) }},
		{mh, []string{"q_value"}, tableColumn{"q", 14, alignRight},
			func(f *exposedFinding, c dif.Criteria) string {
				return probability(f.value(mh, "q_value"), c.FalseDiscovery)
			}},
		{std, []string{"p_dif"}, tableColumn{"P-DIF", 14, alignRight}, plainValue(std, "p_dif", 3)},
	}
}

// itemTable lists every item of the comparison with its main statistics and outcome.
func (r *report) itemTable(i int, c *exposedComparison) {
	if c.withheld || len(c.findings) == 0 {
		return
	}
	criteria := r.x.plan.Criteria
	columns := []tableColumn{
		{"No.", 9, alignRight}, {head: "Item"},
		{"n\nref.", 14, alignRight}, {"n\nfocal", 14, alignRight},
		{"Correct\nref.", 14, alignRight}, {"Correct\nfocal", 14, alignRight},
	}
	var main []mainColumn
	for _, m := range mainColumns(criteria) {
		if slices.Contains(r.x.plan.Methods, m.method) {
			main = append(main, m)
			columns = append(columns, m.column)
		}
	}
	outcome := tableColumn{"Class", 18, alignLeft}
	if slices.ContainsFunc(c.findings, func(f exposedFinding) bool { return f.Classification.Class == nil }) {
		outcome = tableColumn{"Class, or (provisional)\nand reason", 40, alignLeft}
	}
	columns = append(columns, outcome, tableColumn{"Notes", 13, alignLeft})
	r.tablePage(i, c, columns)
	r.heading(fmt.Sprintf("All items: %s against %s", shortenRunes(c.Focal, 60), shortenRunes(c.Reference, 60)), 20)
	notes := c.notes()
	var rows [][]tableCell
	for k := range c.findings {
		f := &c.findings[k]
		name := f.name()
		if f.role == dif.RolePretest {
			name += " (pretest)"
		}
		row := cells(fmt.Sprint(f.number), name, f.nReference.cell(), f.nFocal.cell(), fixed(f.PReference, 2), fixed(f.PFocal, 2))
		for _, m := range main {
			row = append(row, tableCell{text: m.text(f, criteria)})
		}
		letter, provisional := f.class()
		row = append(row,
			tableCell{text: f.verdict(), bold: !provisional && severity(letter) != 'A', dim: provisional},
			tableCell{text: f.marks(notes)})
		rows = append(rows, row)
	}
	text := "n: candidates with a label, a matching score and a scored answer. Correct: proportion correct, or mean score over the maximum. " +
		"D-DIF and P-DIF: negative is harder for the focal group. " +
		"Rounded for print, with more digits where rounding would contradict the letter; letters come from unrounded values."
	var marks []string
	for _, n := range notes {
		if n.mark != "" {
			marks = append(marks, n.mark+": "+shortNote(n.code))
		}
	}
	if len(marks) > 0 {
		text += " Notes, explained at the head of the comparison: " + strings.Join(marks, "; ") + "."
	}
	r.tableWithNote(columns, rows, 7, text)
}

// tablePage begins the page of a wide table: upright where the columns leave room for the
// names of the items.
func (r *report) tablePage(i int, c *exposedComparison, columns []tableColumn) {
	used := r.itemColumn(c)
	for _, column := range columns {
		used += column.width
	}
	r.running = comparisonTitle(i, c)
	r.addPage(used > portraitWidth)
}

// itemColumn is the least width of the column with the names of the items: that of the
// longest, or of a part of it, on as many lines as it needs.
func (r *report) itemColumn(c *exposedComparison) float64 {
	widest := 0.0
	for i := range c.findings {
		f := &c.findings[i]
		name := f.name()
		if f.role == dif.RolePretest {
			name += " (pretest)"
		}
		widest = max(widest, r.widthOf(shortenRunes(name, 60), style{size: furtherSize}))
	}
	return min(max(widest+2*tablePad+1, 16), 40)
}

const (
	portraitWidth = 210.0 - 2*marginSide // of an upright page, between the margins
)
