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

// heads and counts are the outcomes side by side, worst first.
func (t tally) counts() []int {
	return []int{t.cMinus, t.cPlus, t.bMinus, t.bPlus, t.aOpen, t.a, t.noVerdict}
}

// outcomeHeads name the entries of counts.
var outcomeHeads = []struct{ short, long string }{
	{"C-", "large, harder for focal"},
	{"C+", "large, easier for focal"},
	{"B-", "moderate, harder for focal"},
	{"B+", "moderate, easier for focal"},
	{"A (open)", "large difference not excluded"},
	{"A", "none or small"},
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
		text = fmt.Sprintf("By chance alone, with no item working differently, %s of the %s would be lettered B or C (C: %s).",
			about(e.BOrC), plural(t.letters(), "item with a letter", "items with a letter"), about(e.C))
	}
	if e.Tests > 0 {
		if text != "" {
			text += " "
		}
		text += fmt.Sprintf("Of %s, %s would have p below %s by chance.", plural(e.Tests, "test", "tests"), about(e.Significant), shortest(&alpha))
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
	case t.letters() == 0:
		text = fmt.Sprintf("None of the %s could be given a letter: %s.", plural(t.items, "item", "items"), t.reasonsText())
	case flagged == 0:
		text = fmt.Sprintf("Of %s, none was lettered B or C.", plural(t.items, "item", "items"))
	default:
		text = fmt.Sprintf("Of %s, %s lettered C and %s B.", plural(t.items, "item", "items"), wasWere(t.cMinus+t.cPlus), whole(t.bMinus+t.bPlus))
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
	if n == 1 {
		return "1 was"
	}
	return whole(n) + " were"
}
