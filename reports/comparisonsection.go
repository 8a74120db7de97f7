package reports

import (
	"fmt"
	"slices"

	"difaudit/dif"
)

// comparisonSection reports one comparison: counts, what to know before reading, the
// interval plot, the table of items, the pictures, and what could not be tested.
func (r *report) comparisonSection(i int, c *exposedComparison) {
	r.section(comparisonTitle(i, c), comparisonTitle(i, c), false)
	r.strip(i)
	r.matchingPart(c)
	r.warningsPart(c)
	r.listsPart(c)
	r.untestedPart(c)
	if !c.withheld && len(c.findings) > 0 {
		r.intervalPart(c)
	}
	r.picturesPart(c)
	r.itemTable(i, c)
	r.furtherTable(i, c)
}

func (r *report) matchingPart(c *exposedComparison) {
	r.heading("Matching", 16)
	text := "Candidates were matched on " + matchingWords(c.Matching.Variable) + "; " + levelWords(c.Matching.Levels) + "."
	if a := c.Matching.Reliability; a != nil {
		text += " Its reliability (coefficient alpha) is " + fixed(a, 2) + "."
	}
	if s := c.Matching.ScoreCorrelation; s != nil {
		text += " It correlates " + fixed(s, 2) + " with the total of the scored items."
	}
	removed := len(c.Matching.RemovedItems) + c.removedUnnamed
	switch {
	case c.withheld:
	case r.x.plan.Matching.Purification == dif.PurifyNone || c.Matching.Variable == dif.MatchExternal:
		text += " No item was removed from it."
	case removed == 0:
		text += " The first pass removed no item from it."
	default:
		still := "which still counts in its own test"
		if removed > 1 {
			still = "each still counting in its own test"
		}
		text += fmt.Sprintf(" The first pass removed %s from it, %s", plural(removed, "item", "items"), still)
		if len(c.Matching.RemovedItems) > 0 {
			text += ": " + list(c.Matching.RemovedItems, 60)
		}
		if c.removedUnnamed > 0 {
			text += fmt.Sprintf(" (%s not named, to protect candidates)", whole(c.removedUnnamed))
		}
		text += "."
	}
	if d := medianDetectable(c); d != nil {
		who := "Half of the items"
		if len(c.findings) == 1 {
			who = "The item"
		}
		text += fmt.Sprintf(" %s would show a true D-DIF of %s or more with 80 %% power; smaller ones are usually missed.", who, fixed(d, 2))
	}
	r.paragraph(text, body)
	r.setsPart(c.sets)
}

// setsPart lists the presented sets: those of a named form, and those whose groups are
// large enough to be shown. The others are only counted.
func (r *report) setsPart(sets []exposedSet) {
	const most = 40
	var rows [][]tableCell
	small, more := 0, 0
	for _, s := range sets {
		switch {
		case s.Form == nil && (s.reference.hiding != visible || s.focal.hiding != visible):
			small++
		case len(rows) == most:
			more++
		default:
			rows = append(rows, cells(fmt.Sprint(s.Set), orMissing(s.Form), whole(s.Items), s.reference.String(), s.focal.String()))
		}
	}
	if len(rows) > 0 {
		r.space(1.5)
		r.table([]tableColumn{{"Set", 14, alignRight}, {head: "Form"}, {"Items", 18, alignRight}, {"Reference", 30, alignRight}, {"Focal", 30, alignRight}}, rows, 7.5)
	}
	if small > 0 {
		r.paragraph(fmt.Sprintf("%s with fewer than 10 candidates of a group, or withheld to protect one, not listed.", plural(small, "further set", "further sets")), caption)
	}
	if more > 0 {
		r.paragraph(fmt.Sprintf("The evidence holds %s more.", plural(more, "set", "sets")), caption)
	}
}

func (r *report) warningsPart(c *exposedComparison) {
	if len(c.Warnings) == 0 {
		return
	}
	r.heading("Before reading the results", 12)
	for _, w := range c.Warnings {
		r.bullet(warningMessage(w))
	}
}

func (r *report) bullet(text string) {
	lines := r.wrap(text, body, r.width()-5)
	r.need(float64(min(len(lines), 4)) * body.lineHeight())
	r.put(r.left()+1, r.y+body.size*0.3528, "·", bodyBold)
	for _, line := range lines {
		r.need(body.lineHeight())
		r.put(r.left()+5, r.y+body.size*0.3528, line, body)
		r.y += body.lineHeight()
	}
	r.space(0.8)
}

// listsPart lists the items behind each warning, and those whose letter depends on the
// continuity correction.
func (r *report) listsPart(c *exposedComparison) {
	notes := c.notes()
	var dependent []string
	for i := range c.findings {
		f := &c.findings[i]
		letter, _ := f.class()
		if other := f.Classification.ClassIfCorrected; other != nil && letter != "" && *other != letter {
			dependent = append(dependent, fmt.Sprintf("%s (%s, corrected %s)", f.name(), letter, *other))
		}
	}
	if len(notes)+len(dependent) == 0 {
		return
	}
	r.heading("Notes on items", 12)
	if len(dependent) > 0 {
		r.bullet(fmt.Sprintf("Departure from the corrected chi-square of the first published rule changes the letter of %s: %s.",
			plural(len(dependent), "item", "items"), list(dependent, 60)))
	}
	for _, n := range notes {
		if n.code == dif.WarnLetterDependsOnTest && len(dependent) > 0 {
			r.bullet(fmt.Sprintf("%s%s The items are those just named.", n.prefix(), n.sentence))
			continue
		}
		items := c.listItems(n.items, 60)
		r.bullet(fmt.Sprintf("%s%s %s: %s.", n.prefix(), n.sentence, plural(len(n.items), "item", "items"), items))
	}
}

// listItems names items; where they are most of the comparison, the others.
func (c *exposedComparison) listItems(items []string, most int) string {
	if len(items) < 8 || 2*len(items) < len(c.findings) {
		return list(items, most)
	}
	var others []string
	for i := range c.findings {
		if name := c.findings[i].name(); !slices.Contains(items, name) {
			others = append(others, name)
		}
	}
	switch {
	case len(others) == 0:
		return "all items"
	case len(others) <= 20 && len(others) < len(items):
		return "all items but " + list(others, most)
	}
	return list(items, most)
}

// untestedPart lists the items without a verdict by reason, with what the reason means.
func (r *report) untestedPart(c *exposedComparison) {
	type group struct {
		reason, detail string
		withheld       bool
		items          []string
	}
	var groups []group
	for i := range c.findings {
		f := &c.findings[i]
		if f.Classification.Class != nil {
			continue
		}
		reason, detail := value(f.Classification.Reason), detailText(f.Classification.Detail)
		k := slices.IndexFunc(groups, func(g group) bool { return g.reason == reason && g.detail == detail && g.withheld == f.withheld })
		if k < 0 {
			k = len(groups)
			groups = append(groups, group{reason: reason, detail: detail, withheld: f.withheld})
		}
		groups[k].items = append(groups[k].items, f.name())
	}
	if len(groups) == 0 {
		return
	}
	r.heading("Items without a verdict, and why", 34)
	var rows [][]tableCell
	for _, g := range groups {
		words := reasonSentence(g.reason, r.x.plan.Criteria)
		switch {
		case g.reason == "":
			words = "The evidence names no reason."
		case g.withheld && g.reason != dif.ReasonWithheldForPrivacy:
			words += " Results are withheld, to protect candidates."
		case g.reason == dif.ReasonTooFewCandidates:
			words += " Statistics are given so that evidence can build up; a letter in parentheses is provisional."
		}
		if g.detail != "" {
			words += " Cause: " + g.detail + "."
		}
		items := c.listItems(g.items, 120)
		row := cells(shortReason(g.reason), whole(len(g.items)), words, items)
		row[0].bold = true
		rows = append(rows, row)
	}
	r.table([]tableColumn{{"No verdict", 28, alignLeft}, {"Items", 12, alignRight}, {"What it means", 62, alignLeft}, {head: "Which"}}, rows, 7.5)
}

func (r *report) intervalPart(c *exposedComparison) {
	plot := intervalHead + intervalFoot + float64(len(c.findings))*intervalRowHeight
	if whole := plot + 22; whole > r.room() && whole < r.floor()-marginTop {
		r.addPage(false) // a plot that fits on one page is not torn
	}
	r.heading("D-DIF of all items, with 95 % intervals", intervalHead+intervalFoot+6*intervalRowHeight)
	r.paragraph("Dot: A. Hollow triangle: B. Filled triangle: C; triangles point to the side of the difference. Broken line: the letter, if any, is provisional. "+
		"Shading begins at 1.0 and deepens at 1.5 in size. An arrow: the interval goes on.", caption)
	r.space(1)
	rows := make([]intervalRow, len(c.findings))
	for i := range c.findings {
		f := &c.findings[i]
		letter, _ := f.class()
		rows[i] = intervalRow{number: f.number, item: f.name(), class: letter, verdict: f.verdict(), reason: f.reasonText()}
		if mh := f.MantelHaenszel(); mh != nil {
			rows[i].delta, rows[i].low, rows[i].high = finite(mh.Delta), finite(mh.DeltaLow), finite(mh.DeltaHigh)
		}
	}
	r.intervalPlot(rows)
}

// flaggedItems returns the findings with letter B or C, provisional ones included, in
// item order. Every one of them is pictured.
func (c *exposedComparison) flaggedItems() []*exposedFinding {
	var flagged []*exposedFinding
	for i := range c.findings {
		if c.findings[i].flagged() {
			flagged = append(flagged, &c.findings[i])
		}
	}
	return flagged
}
