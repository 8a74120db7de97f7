package reports

import (
	"fmt"
	"math"
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
	r.running = comparisonTitle(i, c)
	r.addPage(true)
	r.heading(fmt.Sprintf("All items: %s against %s", shortenRunes(c.Focal, 60), shortenRunes(c.Reference, 60)), 20)
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
	r.table(columns, rows, 7)
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
	r.paragraph(text, caption)
}

// furtherColumn is a value of a method that the main table does not show.
type furtherColumn struct {
	method, key string
	column      tableColumn
}

const furtherSize = 7     // points
const furtherWidth = 14.5 // at least

// furtherTable lists the remaining values of every method of the plan, whatever the
// methods are, over as many tables as their number needs. Columns without any value
// are left out.
func (r *report) furtherTable(i int, c *exposedComparison) {
	if c.withheld || len(c.findings) == 0 {
		return
	}
	further := r.furtherColumns(c)
	base := []tableColumn{
		{"No.", 9, alignRight}, {head: "Item"},
		{"matched\nref.", 17, alignRight}, {"matched\nfocal", 17, alignRight}, {"levels\nused", 14.5, alignRight},
		{"item-rest\nref.", 17, alignRight}, {"item-rest\nfocal", 17, alignRight},
	}
	r.running = comparisonTitle(i, c)
	r.addPage(true)
	r.heading(fmt.Sprintf("Further statistics: %s against %s", shortenRunes(c.Focal, 60), shortenRunes(c.Reference, 60)), 20)
	for first := true; first || len(further) > 0; first = false {
		columns := base
		if !first {
			columns = base[:2]
		}
		used := 40.0
		for _, b := range columns {
			used += b.width
		}
		n := 0
		for n < len(further) && (n == 0 || used+further[n].column.width <= r.width()) {
			used += further[n].column.width
			n++
		}
		part := further[:n]
		further = further[n:]
		columns = slices.Clone(columns)
		for _, f := range part {
			columns = append(columns, f.column)
		}
		var rows [][]tableCell
		for k := range c.findings {
			f := &c.findings[k]
			row := cells(fmt.Sprint(f.number), f.name())
			if first {
				row = append(row, cells(f.nMatchedReference.cell(), f.nMatchedFocal.cell(), f.levels(),
					fixed(f.ItemRest.Reference, 2), fixed(f.ItemRest.Focal, 2))...)
			}
			for _, x := range part {
				row = append(row, tableCell{text: f.furtherText(x.method, x.key)})
			}
			rows = append(rows, row)
		}
		r.table(columns, rows, furtherSize)
	}
	r.paragraph("Matched: candidates at scores that both groups reached. Levels used: scores that both groups reached, and how many of them are informative (answers differ). "+
		"Item-rest: correlation of the item with the matching score less the item. Odds ratio: reference over focal. "+
		"Detectable: the D-DIF found with 80 % power. A p behind a statistic belongs to it. "+r.roughText(c), caption)
}

// roughText says on how many items the statistics of equal odds ratios are left out.
func (r *report) roughText(c *exposedComparison) string {
	n := 0
	for i := range c.findings {
		if c.findings[i].warned(dif.WarnBreslowDaySparse) {
			n++
		}
	}
	if n == 0 {
		return ""
	}
	return fmt.Sprintf("Breslow-Day and Tarone are left out on %s, where matching scores hold too few candidates for them.", plural(n, "item", "items"))
}

func (f *exposedFinding) levels() string {
	if f.withheld {
		return missing
	}
	return fmt.Sprintf("%d / %d", f.StrataUsed, f.StrataInformative)
}

func (r *report) furtherColumns(c *exposedComparison) []furtherColumn {
	main := map[string]bool{}
	for _, m := range mainColumns(r.x.plan.Criteria) {
		for _, key := range m.keys {
			main[m.method+"."+key] = true
		}
	}
	var out []furtherColumn
	for _, m := range dif.Methods() {
		if !slices.Contains(r.x.plan.Methods, m.ID()) {
			continue
		}
		for _, col := range m.New().Columns() {
			if main[m.ID()+"."+col.Key] {
				continue
			}
			any := slices.ContainsFunc(c.findings, func(f exposedFinding) bool { return f.furtherText(m.ID(), col.Key) != missing })
			if !any {
				continue
			}
			head := col.Heading
			if m.ID() == "standardization" {
				head = "P-DIF " + head
			}
			width := furtherWidth
			for _, word := range strings.Fields(head) {
				width = max(width, r.widthOf(word, style{bold: true, size: furtherSize})+2*tablePad+0.5)
			}
			out = append(out, furtherColumn{m.ID(), col.Key, tableColumn{head, width, alignRight}})
		}
	}
	return out
}

// furtherText prints a value by the kind its key tells. Statistics of equal odds ratios
// are left out where the evidence calls them rough.
func (f *exposedFinding) furtherText(method, key string) string {
	if method == "breslow_day" && !strings.HasPrefix(key, "trend") && f.warned(dif.WarnBreslowDaySparse) {
		return missing
	}
	v := f.value(method, key)
	switch {
	case v == nil:
		return missing
	case strings.Contains(key, "p_value"), strings.Contains(key, "q_value"):
		return probability(v, 0.05)
	case key == "df":
		return fixed(v, 0)
	case strings.HasPrefix(key, "p_dif"):
		return fixed(v, 3)
	case math.Abs(*v) >= 1e6:
		return fmt.Sprintf("%.2e", *v)
	}
	return fixed(v, 2)
}
