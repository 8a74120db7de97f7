package reports

import (
	"fmt"
	"strconv"
)

const (
	mostStrips    = 2 // comparisons shown with large counts on the first page
	mostFrontRows = 10
	mostHeadlines = 4 // comparisons summed up in a sentence each
)

// frontPage tells a director alone what was audited and found, and what follows from it.
func (r *report) frontPage() {
	r.running = ""
	r.addPage(false)
	r.bookmark("Summary", 0)
	r.put(r.left(), r.y+3, "AUDIT OF ITEMS FOR DIFFERENTIAL ITEM FUNCTIONING (DIF)", style{bold: true, size: 7.5, ink: amber})
	r.y += 6
	title := style{bold: true, size: 20, ink: navy}
	lines := r.wrap(r.title(), title, r.width())
	if len(lines) > 2 {
		title.size = 12
		lines = r.wrap(r.title(), title, r.width())
	}
	for _, line := range lines {
		r.put(r.left(), r.y+title.size*0.3528, line, title)
		r.y += title.size * 0.3528 * 1.25
	}
	r.space(2)
	r.facts()
	r.space(1)
	r.heading("What was asked", 10)
	r.paragraph(r.question(), style{size: 8.3, ink: ink})
	r.heading("What was found", 30)
	if len(r.x.comparisons) <= mostStrips {
		for i := range r.x.comparisons {
			r.strip(i)
			r.lookFirst(&r.x.comparisons[i])
		}
	} else {
		r.frontTable()
	}
	r.conclusions()
	r.frontContents()
	if r.altered > 0 {
		r.space(1.5)
		r.paragraph(r.alteredText(), caption)
	}
}

func (r *report) alteredText() string {
	return fmt.Sprintf("Some names or labels hold characters that the fonts of this report cannot print; %c stands for each. "+
		"Items can be told by their number. The CSV and the evidence hold the characters unchanged.", replacement)
}

// facts names the audit in a grid.
func (r *report) facts() {
	r.line(r.left(), r.y, r.right(), r.y, stroke{navy, 0.5, false})
	r.space(1.5)
	x := r.x
	row := func(pairs ...string) {
		w := r.width() / float64(len(pairs)/2)
		deepest := r.y
		for i := 0; i < len(pairs); i += 2 {
			at := r.left() + float64(i/2)*w
			r.put(at, r.y+2.6, pairs[i], style{size: 6.8, ink: quiet})
			y := r.y + 6.6
			s := style{bold: true, size: 9, ink: ink}
			if len(pairs) == 2 {
				s = style{size: 8, ink: ink}
			}
			for _, line := range r.wrap(pairs[i+1], s, w-3) {
				r.put(at, y, line, s)
				y += s.lineHeight()
			}
			deepest = max(deepest, y)
		}
		r.y = deepest - 1.6
	}
	row("Date of the report (UTC)", r.options.Date.Format("2006-01-02"),
		"Candidate records received", whole(x.inputs.CandidatesReceived),
		"of these analysed", whole(x.inputs.CandidatesAnalysed),
		"Items", whole(len(x.inputs.Items)))
	row("Comparisons", whole(len(x.comparisons)),
		"Criteria", shortenRunes(x.plan.Criteria.Name, 60),
		"Statistics", "difaudit "+x.engine.Version,
		"Pages", strconv.Itoa(r.pages))
	row("Digest of the data (SHA-256)", x.inputs.DataSHA256)
	digest := r.options.EvidenceSHA256
	if digest == "" {
		digest = "not given"
	}
	row("Digest of the evidence this report shows (SHA-256)", digest)
	r.space(1.5)
	r.line(r.left(), r.y, r.right(), r.y, stroke{navy, 0.5, false})
}

func (r *report) question() string {
	return "Differential item functioning (DIF) means that candidates of two groups who do equally well on the measure they are matched on do not do equally well on an item. " +
		"For every item and comparison the audit estimates how large that difference is, and gives it a letter where there is enough to tell: " +
		"A where the rule sees no difference that it treats as important (not significant, or below 1.0 in size), B for a moderate, C for a large one; - where the item is harder and + where it is easier for the focal group."
}

// strip shows the counts of one comparison, each as large as the others.
func (r *report) strip(i int) {
	c := &r.x.comparisons[i]
	t := c.tally()
	head := style{bold: true, size: 9, ink: navy}
	r.need(34)
	name := fmt.Sprintf("%s: focal group %s (%s) against reference group %s (%s)", c.Grouping, shortenRunes(c.Focal, 40), c.nFocal, shortenRunes(c.Reference, 40), c.nReference)
	for _, line := range r.wrap(name, head, r.width()) {
		r.put(r.left(), r.y+3.2, line, head)
		r.y += head.lineHeight()
	}
	r.space(0.8)
	const gap, height = 1.6, 17.5
	w := (r.width() - 6*gap) / 7
	for k, n := range t.counts() {
		x := r.left() + float64(k)*(w+gap)
		r.box(x, r.y, w, height, pale)
		r.line(x, r.y, x+w, r.y, stroke{navy, 0.5, false})
		r.putCentre(x+w/2, r.y+7.2, whole(n), style{bold: true, size: 15, ink: ink})
		r.putCentre(x+w/2, r.y+11, outcomeHeads[k].short, style{bold: true, size: 7.5, ink: ink})
		y := r.y + 13.6
		s := style{size: 5.6, ink: quiet}
		for _, line := range r.wrap(outcomeHeads[k].long, s, w-1) {
			r.putCentre(x+w/2, y, line, s)
			y += 2.2
		}
	}
	r.y += height + 1.4
	r.paragraph(c.headline()+" "+c.chanceText(r.x.plan.Criteria.ClassAlpha), style{size: 8.3, ink: ink})
	r.space(2)
}

// lookFirst names the items with a letter C, then B, as far as a line or two hold them.
func (r *report) lookFirst(c *exposedComparison) {
	var names []string
	for _, level := range []byte{'C', 'B'} {
		for i := range c.findings {
			f := &c.findings[i]
			if letter, provisional := f.class(); !provisional && severity(letter) == level {
				names = append(names, fmt.Sprintf("%s (%s)", middleRunes(f.name(), 32), letter))
			}
		}
	}
	if len(names) == 0 {
		return
	}
	r.y -= 1.5
	r.paragraph("To look at first: "+list(names, 10)+".", style{bold: true, size: 8.3, ink: ink})
	r.space(2.5)
}

// frontContents lists the sections at the foot of the first page where there is room.
func (r *report) frontContents() {
	const most = 8
	lines := float64(len(r.x.comparisons) + 3)
	if r.contentsShown = len(r.x.comparisons) <= most && r.room() > 16+lines*4.2; r.contentsShown {
		r.heading("Contents", 10)
		r.contents()
	}
}

// frontTable shows the counts of many comparisons.
func (r *report) frontTable() {
	n := len(r.x.comparisons)
	shownRows := n
	if n > mostFrontRows {
		shownRows = mostFrontRows
	}
	var flagged, noVerdict, findings int
	var chance float64
	for i := range r.x.comparisons {
		t := r.x.comparisons[i].tally()
		flagged += t.cMinus + t.cPlus + t.bMinus + t.bPlus
		noVerdict += t.noVerdict
		findings += t.items
		chance += r.x.comparisons[i].Summary.ExpectedByChance.BOrC
	}
	verdicts := "every finding has a verdict."
	if noVerdict > 0 {
		verdicts = wasWere(noVerdict) + " left without a verdict."
	}
	flags := fmt.Sprintf("%s lettered B or C, where %s would be expected by chance if no item worked differently; %s", capitalized(wasWere(flagged)), about(chance), verdicts)
	if noVerdict == findings {
		flags = "None could be given a letter; the sections say why."
	}
	r.paragraph(fmt.Sprintf("%s give %s. %s", plural(n, "comparison", "comparisons"), plural(findings, "finding", "findings"), flags), body)
	r.space(1.5)
	r.outcomeTable(shownRows)
	if n <= mostHeadlines {
		for i := range r.x.comparisons {
			c := &r.x.comparisons[i]
			r.space(0.8)
			r.paragraph(fmt.Sprintf("%d. %s against %s. %s", i+1, shortenRunes(c.Focal, 40), shortenRunes(c.Reference, 40), c.headline()), style{size: 8.3, ink: ink})
		}
	}
	if shownRows < n {
		r.paragraph(fmt.Sprintf("The table of section \"%s\" holds %s more.", titleCounted, plural(n-shownRows, "comparison", "comparisons")), caption)
	}
}

// outcomeTable lists the counts of the first comparisons, n of them.
func (r *report) outcomeTable(n int) {
	columns := []tableColumn{{head: "Comparison (focal against reference)"}}
	for _, h := range outcomeHeads {
		width := 11.0
		switch h.short {
		case "A (open)":
			width = 15
		case "No verdict":
			width = 16
		}
		columns = append(columns, tableColumn{h.short, width, alignRight})
	}
	columns = append(columns, tableColumn{"B or C\nby chance", 19, alignRight})
	var rows [][]tableCell
	for i := range r.x.comparisons[:n] {
		c := &r.x.comparisons[i]
		row := cells(fmt.Sprintf("%d. %s: %s against %s", i+1, c.Grouping, shortenRunes(c.Focal, 40), shortenRunes(c.Reference, 40)))
		for k, m := range c.tally().counts() {
			row = append(row, tableCell{text: whole(m), bold: k < 4 && m > 0 || k == 6})
		}
		chance := expected(c.Summary.ExpectedByChance.BOrC)
		if c.withheld {
			chance = missing
		}
		rows = append(rows, append(row, tableCell{text: chance}))
	}
	r.table(columns, rows, 7.5)
	r.paragraph("A (open): letter A, but the interval reaches a large difference; it is not excluded. No verdict: not enough to tell, or not testable; reasons in the sections.", caption)
}

// conclusions says what a reader may and may not take from the report.
func (r *report) conclusions() {
	may := []string{
		"Which items showed a difference between matched candidates, how large, in which direction, and how certain.",
		"On which items the data could not tell. No verdict is a result of its own, not a good or a bad sign.",
		"Which items a review by people who know content and candidates should look at first.",
	}
	mayNot := []string{
		"That an item, the test or anyone's conduct is at fault. A letter is a statistical signal; its cause needs judgement.",
		"That items lettered A, or without a verdict, treat the groups alike. Small numbers hide even large differences.",
		"Why the groups differ in their total scores, or what removing an item would do to them.",
	}
	const gap = 6.0
	w := (r.width() - gap) / 2
	s := style{size: 8.2, ink: ink}
	height := func(points []string) float64 {
		h := 7.0
		for _, p := range points {
			h += float64(len(r.wrap(p, s, w-9)))*s.lineHeight() + 1
		}
		return h
	}
	h := max(height(may), height(mayNot)) + 1
	r.need(h + 3)
	r.space(2)
	top := r.y
	for i, side := range []struct {
		head   string
		points []string
	}{{"What this report lets you say", may}, {"What it does not let you say", mayNot}} {
		x := r.left() + float64(i)*(w+gap)
		r.box(x, top, w, h, paler)
		r.line(x, top, x, top+h, stroke{[]colour{navy, amber}[i], 0.9, false})
		r.put(x+4, top+5, side.head, style{bold: true, size: 9, ink: ink})
		y := top + 7.2
		for _, p := range side.points {
			r.put(x+4, y+s.size*0.3528, "·", bodyBold)
			for _, line := range r.wrap(p, s, w-9) {
				r.put(x+7, y+s.size*0.3528, line, s)
				y += s.lineHeight()
			}
			y++
		}
	}
	r.y = top + h
}
