package intake

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// notes says in sentences what was taken for what.
func (r *reading) notes(d *dif.Data) []string {
	var out []string
	note := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	note("taken as items: %s", itemList(d.Items))
	for _, g := range d.Groupings {
		note("grouping %s: %s", shown(g.Name), labelCounts(g))
	}
	if len(d.Forms) > 0 {
		note("forms: %d", len(d.Forms))
	}
	var unused []string
	for _, name := range r.responses.header {
		if name != "" && r.columnUse(name) == useNothing {
			unused = append(unused, shown(name))
		}
	}
	if len(unused) > 0 {
		note("columns of %s that were not used: %s", r.responses.name, strings.Join(unused, ", "))
	}
	if c := r.candidates; c != nil {
		if len(c.unused) > 0 {
			var names []string
			for _, name := range c.unused {
				names = append(names, shown(name))
			}
			note("columns of %s that were not used: %s", c.table.name, strings.Join(names, ", "))
		}
		note("candidates in both files: %d, only in %s: %d, only in %s: %d",
			r.join.matched, r.responses.name, r.join.onlyResponses, c.table.name, r.join.onlyCandidates)
		if c.table.blanks > 0 {
			note("%s of %s skipped, the first is row %d", plural(c.table.blanks, "blank row"), c.table.name, c.table.blankAt)
		}
	}
	if r.responses.blanks > 0 {
		note("%s of %s skipped, the first is row %d", plural(r.responses.blanks, "blank row"), r.responses.name, r.responses.blankAt)
	}
	if n := r.problems.Count(duplicateResponse); n > 0 {
		note("%s with a repeated answer used once", plural(n, "row"))
	}
	note("candidate records: %d received%s, %d to be analysed", d.Received, r.flow(d), d.Candidates())
	return out
}

// labelCounts lists the labels of a grouping with their candidates, the first ones
// where there are many.
func labelCounts(g dif.Grouping) string {
	const most = 50
	counts := make([]int, len(g.Labels)+1)
	for _, c := range g.Codes {
		counts[c]++
	}
	var parts []string
	for i, label := range g.Labels[:min(len(g.Labels), most)] {
		parts = append(parts, fmt.Sprintf("%s %d", shown(label), counts[i+1]))
	}
	if more := len(g.Labels) - len(parts); more > 0 {
		rest := 0
		for _, n := range counts[1+most:] {
			rest += n
		}
		parts = append(parts, fmt.Sprintf("%s with %s", plural(more, "more label"), plural(rest, "candidate")))
	}
	return strings.Join(append(parts, fmt.Sprintf("not stated %d", counts[0])), ", ")
}

// flow returns what was dropped between receipt and analysis.
func (r *reading) flow(d *dif.Data) string {
	var b strings.Builder
	left := d.Received
	for _, e := range d.Exclusions {
		if e.Grouping != nil {
			continue
		}
		left -= e.Count
		what := map[string]string{
			dif.ExcludedExactDuplicate: either(e.Count, "exact copy", "exact copies") + " collapsed",
			dif.ExcludedOtherAttempt:   either(e.Count, "other attempt", "other attempts") + " left out",
		}[e.Reason]
		fmt.Fprintf(&b, ", %d %s (%d left)", e.Count, what, left)
	}
	return b.String()
}

// itemList names items with their maxima, all of them where they are few.
func itemList(items []dif.Item) string {
	const all = 40
	type class struct {
		what string
		ids  []string
	}
	var classes []class
	for _, it := range items {
		what := fmt.Sprintf("max %d", it.MaxScore)
		switch {
		case it.KeyMissing:
			what = "choices without a key"
		case it.Options != nil:
			what = "choices with a key"
		}
		id := shown(it.ID)
		if it.Version != "1" {
			id += " version " + shown(it.Version)
		}
		k := slices.IndexFunc(classes, func(c class) bool { return c.what == what })
		if k < 0 {
			k = len(classes)
			classes = append(classes, class{what: what})
		}
		classes[k].ids = append(classes[k].ids, id)
	}
	var parts []string
	for _, c := range classes {
		list := strings.Join(c.ids, ", ")
		if len(c.ids) > all {
			list = c.ids[0] + " ... " + c.ids[len(c.ids)-1]
		}
		parts = append(parts, fmt.Sprintf("%s (%s): %s", plural(len(c.ids), "item"), c.what, list))
	}
	return strings.Join(parts, "; ")
}
