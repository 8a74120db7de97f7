package reports

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"difaudit/dif"
)

// furtherColumn is a column of the table of further statistics, with a text for every
// finding.
type furtherColumn struct {
	column tableColumn
	texts  []string
	joined bool // belongs to the column before it and stands in the same table
}

const furtherSize = 7 // points

// furtherTable lists what the main table does not show: matched candidates, levels,
// item-rest correlations, and the remaining values of every method of the plan, over as
// many tables as their number needs. Columns without any value are left out.
func (r *report) furtherTable(i int, c *exposedComparison) {
	if c.withheld || len(c.findings) == 0 {
		return
	}
	number := tableColumn{"No.", 9, alignRight}
	further := append(r.matchedColumns(c), r.furtherColumns(c)...)
	all := []tableColumn{number}
	for _, f := range further {
		all = append(all, f.column)
	}
	r.tablePage(i, c, all)
	r.heading(fmt.Sprintf("Further statistics: %s against %s", shortenRunes(c.Focal, 60), shortenRunes(c.Reference, 60)), 20)
	for len(further) > 0 {
		n := columnsThatFit(further, r.width()-number.width-r.itemColumn(c))
		columns := []tableColumn{number, {head: "Item"}}
		for _, f := range further[:n] {
			columns = append(columns, f.column)
		}
		var rows [][]tableCell
		for k := range c.findings {
			row := cells(fmt.Sprint(c.findings[k].number), c.findings[k].name())
			for _, f := range further[:n] {
				row = append(row, tableCell{text: f.texts[k]})
			}
			rows = append(rows, row)
		}
		further = further[n:]
		note := ""
		if len(further) == 0 {
			note = r.furtherNote(c)
		}
		r.tableWithNote(columns, rows, furtherSize, note)
	}
}

// furtherColumn makes a column as wide as its texts and the words of its head need.
func (r *report) furtherColumn(c *exposedComparison, head string, joined bool, text func(f *exposedFinding) string) furtherColumn {
	out := furtherColumn{column: tableColumn{head: head, align: alignRight}, joined: joined}
	widest := 8.0
	for i := range c.findings {
		t := text(&c.findings[i])
		out.texts = append(out.texts, t)
		widest = max(widest, r.widthOf(t, style{size: furtherSize}))
	}
	for _, word := range strings.Fields(head) {
		widest = max(widest, r.widthOf(word, style{bold: true, size: furtherSize}))
	}
	out.column.width = widest + 2*tablePad + 0.3
	return out
}

// matchedColumns say how many candidates and levels the statistics rest on.
func (r *report) matchedColumns(c *exposedComparison) []furtherColumn {
	return []furtherColumn{
		r.furtherColumn(c, "matched\nref.", false, func(f *exposedFinding) string { return f.nMatchedReference.cell() }),
		r.furtherColumn(c, "matched\nfocal", true, func(f *exposedFinding) string { return f.nMatchedFocal.cell() }),
		r.furtherColumn(c, "levels\nused", false, (*exposedFinding).levels),
		r.furtherColumn(c, "item-rest\nref.", false, func(f *exposedFinding) string { return fixed(f.ItemRest.Reference, 2) }),
		r.furtherColumn(c, "item-rest\nfocal", true, func(f *exposedFinding) string { return fixed(f.ItemRest.Focal, 2) }),
	}
}

// furtherColumns hold the values of methods that the main table does not show.
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
		statistic, first := "", len(out)
		for _, col := range m.New().Columns() {
			if !belongs(col.Key) {
				statistic = col.Heading
			}
			if main[m.ID()+"."+col.Key] {
				continue
			}
			head := col.Heading
			switch {
			case m.ID() == "standardization":
				head = "P-DIF " + head
			case head == "p" && statistic != "":
				head = statistic + " p"
			}
			column := r.furtherColumn(c, head, belongs(col.Key) && len(out) > first, func(f *exposedFinding) string { return f.furtherText(m.ID(), col.Key) })
			if slices.ContainsFunc(column.texts, func(t string) bool { return t != missing }) {
				out = append(out, column)
			}
		}
	}
	return out
}

// belongs reports whether a value says something of the statistic before it: a p-value,
// degrees of freedom, a standard error.
func belongs(key string) bool {
	return key == "df" || strings.Contains(key, "p_value") && !strings.Contains(key, "exact") || strings.HasSuffix(key, "_se")
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

// columnsThatFit returns how many columns stand in the next table: as many whole groups
// as the width takes, at least one group.
func columnsThatFit(columns []furtherColumn, width float64) int {
	taken, used := 0, 0.0
	for n := 0; n < len(columns); {
		next := n
		for next == n || next < len(columns) && columns[next].joined {
			used += columns[next].column.width
			next++
		}
		if used > width && taken > 0 {
			break
		}
		n, taken = next, next
	}
	return taken
}

// furtherNote explains the columns below the last table.
func (r *report) furtherNote(c *exposedComparison) string {
	text := ("Matched: candidates at scores that both groups reached. Levels used: scores that both groups reached, and how many of them are informative (answers differ). " +
		"Item-rest: correlation of the item with the matching score less the item. Odds ratio: reference over focal. " +
		"Detectable: the D-DIF found with 80 % power. ")
	if slices.Contains(r.x.plan.Methods, "breslow_day") {
		text += "B-D: Breslow-Day. " + r.roughText(c)
	}
	return text
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
