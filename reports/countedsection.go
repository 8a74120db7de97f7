package reports

import (
	"fmt"
	"slices"
	"strings"

	"difaudit/dif"
)

// countedSection shows the contents of the report and the way from the records
// received to the candidates compared.
func (r *report) countedSection() {
	r.section(titleCounted, titleCounted, false)
	if !r.contentsShown {
		r.heading("Contents", 20)
		r.contents()
	}
	in := r.x.inputs

	r.heading("From received to analysed", 20)
	rows := [][]tableCell{cells("Records received", whole(in.CandidatesReceived))}
	explained := 0
	for _, ex := range in.Exclusions {
		explained += ex.Count
		rows = append(rows, cells("left out: "+exclusionWords(ex.Reason), whole(ex.Count)))
	}
	if rest := in.CandidatesReceived - in.CandidatesAnalysed - explained; rest != 0 && in.CandidatesReceived >= in.CandidatesAnalysed {
		rows = append(rows, cells("left out: for reasons the evidence does not name", whole(rest)))
	}
	last := cells("Records analysed", whole(in.CandidatesAnalysed))
	last[0].bold, last[1].bold = true, true
	r.table([]tableColumn{{head: "Step"}, {"Records", 30, alignRight}}, append(rows, last), 8)
	r.splitTables()

	r.heading("Groups", 25)
	r.labelTable()
	r.groupTable()
	if len(r.x.comparisons) > mostFrontRows {
		r.heading("All comparisons at a glance", 25)
		r.outcomeTable(len(r.x.comparisons))
	}
	r.heading("Data received", 20)
	r.sourceTable()
	r.itemRoles()
	for _, w := range in.Warnings {
		if w.Code == "empty_label" {
			continue // the groups above count who stated no label
		}
		r.space(0.8)
		r.paragraph("Noticed on reading the data: "+warningMessage(w), small)
	}
}

// contents lists the sections with their pages.
func (r *report) contents() {
	titles := []string{titleCounted, titleMethods}
	for i := range r.x.comparisons {
		titles = append(titles, comparisonTitle(i, &r.x.comparisons[i]))
	}
	titles = append(titles, titleLimits)
	const most = 24
	for i, t := range titles {
		if len(titles) > most && i >= most-2 && i < len(titles)-1 {
			if i == most-2 {
				r.contentsLine("... and "+plural(len(titles)-1-i, "more comparison", "more comparisons"), 0)
			}
			continue
		}
		r.contentsLine(t, r.known[t])
	}
	r.space(2)
}

func (r *report) contentsLine(title string, page int) {
	s := small
	r.need(s.lineHeight())
	y := r.y + s.size*0.3528
	t := shorten(r.text.clean(title), r.width()-20, r.measure(s))
	r.put(r.left(), y, t, s)
	if page > 0 {
		from := r.left() + r.widthOf(t, s) + 2
		r.line(from, y, r.right()-8, y, stroke{hairline, 0.2, true})
		r.putRight(r.right(), y, fmt.Sprint(page), s)
	}
	r.y += s.lineHeight() * 1.08
}

// splitTables shows how exclusions fall on the labels of each grouping.
func (r *report) splitTables() {
	for _, s := range r.x.splits {
		r.need(25)
		r.paragraph("Left out, by "+s.grouping, bodyBold)
		r.space(0.8)
		columns := []tableColumn{{head: "Reason", width: 62}, {head: "Label"}, {"Records", 34, alignRight}}
		var rows [][]tableCell
		for i, reason := range s.reasons {
			for j, label := range s.labels {
				if c := s.counts[i][j]; c.hiding == visible && c.n == 0 {
					continue
				}
				if label == "" {
					label = "not stated"
				}
				rows = append(rows, cells(exclusionWords(reason), label, s.counts[i][j].String()))
			}
		}
		r.table(columns, rows, 8)
	}
}

// labelTable shows how the candidates analysed fall on the labels of every grouping.
func (r *report) labelTable() {
	columns := []tableColumn{{"Grouping", 40, alignLeft}, {head: "Label"}, {"In the comparisons", 44, alignLeft}, {"Candidates", 26, alignRight}}
	var rows [][]tableCell
	for _, g := range r.x.groupings {
		name := g.name
		add := func(label, part, n string) {
			rows = append(rows, cells(name, label, part, n))
			name = ""
		}
		for i, label := range g.labels {
			add(label, r.partOf(g.name, label), g.counts[i].String())
		}
		if len(g.others) > 0 || g.other != (count{}) {
			add("other labels, not compared", "", g.other.String())
		}
		add("not stated", "", g.notStated.String())
		add("all analysed", "", whole(r.x.inputs.CandidatesAnalysed))
		total := rows[len(rows)-1]
		total[1].bold, total[3].bold = true, true
	}
	r.table(columns, rows, 7.5)
}

// partOf says in which part a label stands in the comparisons of its grouping.
func (r *report) partOf(grouping, label string) string {
	var parts []string
	for i := range r.x.comparisons {
		c := &r.x.comparisons[i]
		for _, p := range []struct{ label, part string }{{c.Reference, "reference"}, {c.Focal, "focal"}} {
			if c.Grouping == grouping && p.label == label && !slices.Contains(parts, p.part) {
				parts = append(parts, p.part)
			}
		}
	}
	return strings.Join(parts, " and ")
}

// groupTable describes the two groups of every comparison.
func (r *report) groupTable() {
	columns := []tableColumn{
		{"Comparison", 30, alignLeft}, {head: "Group"}, {"Candidates", 24, alignRight},
		{"Without a\nmatch", 24, alignRight}, {"Mean\nscore", 15, alignRight}, {"SD", 13, alignRight}, {"Difference\nin SD", 19, alignRight}, {"Relia-\nbility", 14, alignRight},
	}
	var rows [][]tableCell
	for i := range r.x.comparisons {
		c := &r.x.comparisons[i]
		g := c.Groups
		rows = append(rows,
			cells(fmt.Sprintf("%d. %s", i+1, c.Grouping), c.Reference+" (reference)", c.nReference.String(), c.unmatchedRef.String(),
				fixed(g.Reference.Mean, 2), fixed(g.Reference.SD, 2), "", fixed(c.Matching.Reliability, 2)),
			cells("", c.Focal+" (focal)", c.nFocal.String(), c.unmatchedFocal.String(), fixed(g.Focal.Mean, 2), fixed(g.Focal.SD, 2), fixed(g.Difference, 2), ""),
		)
	}
	r.table(columns, rows, 7.5)
	r.paragraph("Candidates have a label and a matching score. Without a match: at a score that nobody of the other group reached; withheld where that would tell of fewer than 10 candidates. Mean, SD and reliability "+
		"(coefficient alpha, both groups together) are of the matching score before items are removed from it. The difference is the focal mean less the reference mean, in pooled SD; it is not DIF.", caption)
}

func (r *report) sourceTable() {
	columns := []tableColumn{{"Content", 19, alignLeft}, {"Administration", 25, alignLeft}, {"Form", 14, alignLeft}, {"Rows", 15, alignRight}, {head: "SHA-256 of the file"}}
	var rows [][]tableCell
	for _, s := range r.x.inputs.Sources {
		rows = append(rows, cells(s.Kind, orMissing(s.Administration), orMissing(s.Form), whole(s.Rows), s.SHA256))
	}
	if len(rows) == 0 {
		r.paragraph("The evidence names no files.", body)
		return
	}
	r.table(columns, rows, 6.3)
}

func orMissing(s *string) string {
	if s == nil || *s == "" {
		return missing
	}
	return *s
}

// itemRoles counts the items by role.
func (r *report) itemRoles() {
	counts := map[string]int{}
	for _, it := range r.x.inputs.Items {
		counts[it.Role]++
	}
	text := plural(len(r.x.inputs.Items), "item", "items")
	for _, role := range []string{dif.RoleOperational, dif.RoleLinking, dif.RolePretest} {
		if n := counts[role]; n > 0 {
			text += fmt.Sprintf("; %s %s", whole(n), role)
		}
	}
	text += "."
	if counts[dif.RolePretest] > 0 {
		text += " Pretest items count in no matching score but their own."
	}
	r.paragraph(text, small)
}
