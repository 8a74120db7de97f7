package reports

import (
	"fmt"
	"strings"

	"difaudit/dif"
)

// tally counts the outcomes of a comparison as the report shows them: a letter A with
// an interval that reaches a large difference is counted apart.
type tally struct {
	cMinus, cPlus, bMinus, bPlus int
	a, aOpen                     int
	noVerdict                    int
	reasons                      dif.Counts
	items                        int
}

func (c *exposedComparison) tally() tally {
	var t tally
	for _, k := range c.Summary.Classes {
		minus := strings.HasSuffix(k.Name, "-")
		switch severity(k.Name) {
		case 'C':
			if minus {
				t.cMinus += k.N
			} else {
				t.cPlus += k.N
			}
		case 'B':
			if minus {
				t.bMinus += k.N
			} else {
				t.bPlus += k.N
			}
		case 'A':
			t.a += k.N
		}
	}
	t.aOpen = c.Summary.LargeDifferenceNotExcluded
	t.a -= t.aOpen
	t.noVerdict = c.Summary.NoVerdict.Total()
	t.reasons = c.Summary.NoVerdict
	t.items = len(c.findings)
	return t
}

func (t tally) letters() int { return t.cMinus + t.cPlus + t.bMinus + t.bPlus + t.a + t.aOpen }

// counts are the outcomes side by side, worst first; outcomeHeads name them.
func (t tally) counts() []int {
	return []int{t.cMinus, t.cPlus, t.bMinus, t.bPlus, t.aOpen, t.a, t.noVerdict}
}

var outcomeHeads = []struct{ short, long string }{
	{"C-", "large, harder for focal"},
	{"C+", "large, easier for focal"},
	{"B-", "moderate, harder for focal"},
	{"B+", "moderate, easier for focal"},
	{"A (open)", "large difference not excluded"},
	{"A", "not significant, or below 1.0 in size"},
	{"No verdict", "not enough to tell"},
}

// reasonsText lists the reasons for no verdict with their counts.
func (t tally) reasonsText() string {
	var parts []string
	for _, r := range t.reasons {
		if r.N > 0 {
			parts = append(parts, fmt.Sprintf("%s (%s)", shortReason(r.Name), whole(r.N)))
		}
	}
	return strings.Join(parts, ", ")
}

// chanceText words what would be expected if no item differed.
func (c *exposedComparison) chanceText(alpha float64) string {
	if c.withheld {
		return ""
	}
	e := c.Summary.ExpectedByChance
	t := c.tally()
	var text string
	if t.letters() > 0 {
		text = fmt.Sprintf("By chance alone, with no item working differently, letters B or C expected among %s with a letter: %s (C: %s).",
			plural(t.letters(), "item", "items"), about(e.BOrC), about(e.C))
	}
	if e.Tests > 0 {
		if text != "" {
			text += " "
		}
		text += fmt.Sprintf("Tests with p below %s expected by chance: %s of %s.", shortest(&alpha), about(e.Significant), whole(e.Tests))
	}
	return text
}

// provisionalFlags counts provisional letters B and C.
func (c *exposedComparison) provisionalFlags() (b, large int) {
	for i := range c.findings {
		letter, provisional := c.findings[i].class()
		switch {
		case !provisional:
		case severity(letter) == 'B':
			b++
		case severity(letter) == 'C':
			large++
		}
	}
	return b, large
}

// headline says in one or two sentences what the comparison found.
func (c *exposedComparison) headline() string {
	if c.withheld {
		return "A group holds fewer than 10 candidates. No statistic of this comparison is shown, to protect them."
	}
	t := c.tally()
	var text string
	switch flagged := t.cMinus + t.cPlus + t.bMinus + t.bPlus; {
	case t.items == 0:
		return "There are no items."
	case t.letters() == 0 && t.items == 1:
		text = fmt.Sprintf("The item could be given no letter: %s.", t.reasonsText())
	case t.letters() == 0:
		text = fmt.Sprintf("None of the %s could be given a letter: %s.", plural(t.items, "item", "items"), t.reasonsText())
	case flagged == 0:
		text = fmt.Sprintf("Of %s, none was lettered B or C.", plural(t.items, "item", "items"))
	default:
		text = fmt.Sprintf("Of %s, %s lettered C and %s lettered B.", plural(t.items, "item", "items"), wasWere(t.cMinus+t.cPlus), wasWere(t.bMinus+t.bPlus))
	}
	if t.letters() > 0 && t.noVerdict > 0 {
		text += fmt.Sprintf(" No verdict was possible on %s: %s.", whole(t.noVerdict), t.reasonsText())
	}
	if t.aOpen > 0 {
		text += fmt.Sprintf(" On %s of the items lettered A the numbers leave room for a large difference.", whole(t.aOpen))
	}
	if b, large := c.provisionalFlags(); b+large > 0 {
		text += fmt.Sprintf(" Provisional letters, without the standing of a verdict: C %s, B %s.", whole(large), whole(b))
	}
	return text
}

func wasWere(n int) string {
	switch n {
	case 0:
		return "none was"
	case 1:
		return "1 was"
	}
	return whole(n) + " were"
}
