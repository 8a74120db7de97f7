package reports

import (
	"fmt"
	"math"
	"slices"

	"difaudit/dif"
)

// caution is a limit of the results that a reader must keep in mind.
type caution struct{ term, text string }

// cautions words the limits of the results, with the numbers of this audit.
func cautions(x *exposed) []caution {
	c := x.plan.Criteria
	var tests int
	var significant, letters float64
	for _, k := range x.comparisons {
		tests += k.Summary.ExpectedByChance.Tests
		significant += k.Summary.ExpectedByChance.Significant
		letters += k.Summary.ExpectedByChance.BOrC
	}
	chance := "No test could be made, so none can mislead by chance."
	if tests > 0 {
		were := "were"
		if tests == 1 {
			were = "was"
		}
		chance = fmt.Sprintf("%s %s made. If no item worked differently at all, %s would still have p below %s, and %s would still be lettered B or C.",
			plural(tests, "test", "tests"), were, about(significant), shortest(&c.ClassAlpha), about(letters))
	}
	return []caution{
		{"A signal, not a judgement", "A letter tells how far an item's statistics stand from no difference. Whether the item, the test or anybody's work is at fault is a question " +
			"about content and use that statistics cannot answer; it needs people who know both."},
		{"Silence proves little", "An item without a flag may still work differently. " + detectableText(x)},
		{"Few candidates", fewCandidates(c)},
		{"Chance", chance},
		{"The yardstick is the test itself", yardstick(x)},
		{"Group labels", "Labels are mostly what candidates said of themselves, in categories coarser than people are. " + notStatedText(x)},
		{"Averages", "D-DIF averages over scores. A difference that turns round between low and high scorers can cancel out in it; see the items marked non-uniform and the pictures."},
		{"Not the gap between groups", "How far two groups lie apart on the whole test is another matter than DIF. This report holds no test-level analysis and does not explain such a gap."},
		{"Who decides", "This report serves the judgement of qualified measurement staff, of counsel, and the rules of the programme and its jurisdiction. It takes the place of none of them."},
		{"Small cells", "Counts of fewer than 10 candidates of a group, and results that rest on them, are kept back to protect people. Columns may therefore not add up."},
		{"Scope", fmt.Sprintf("The results hold for the %s, the %s and the data named by the digest on the first page, and for nothing else.",
			plural(len(x.inputs.Items), "item version", "item versions"), plural(x.inputs.CandidatesAnalysed, "analysed record", "analysed records"))},
	}
}

func fewCandidates(c dif.Criteria) string {
	if c.MinSmallerGroup == 0 && c.MinTotal == 0 {
		return "This plan sets no least number of candidates. Letters that rest on few candidates are uncertain; published practice asks for at least 200 in the smaller group and 500 in all (Zwick 2012)."
	}
	return fmt.Sprintf("Where fewer than %s candidates of the smaller group, or %s in all, could be matched, results are kept to add up over later sittings. They do not settle anything about an item today.",
		whole(c.MinSmallerGroup), whole(c.MinTotal))
}

func yardstick(x *exposed) string {
	external := slices.ContainsFunc(x.comparisons, func(c exposedComparison) bool { return c.Matching.Variable == dif.MatchExternal })
	if external {
		return "Candidates count as equal when their external score is equal. Whatever that score leaves out, or measures differently for the groups, shows up as a difference on items."
	}
	return "Candidates count as equal when their score on these items is equal. If many items differ in the same direction, the score shares the difference and hides part of it."
}

// detectableText gives the middle of the D-DIF values that would be found with 80 %
// power, per comparison.
func detectableText(x *exposed) string {
	const most = 4
	text := ""
	n := 0
	for i := range x.comparisons {
		c := &x.comparisons[i]
		d := medianDetectable(c)
		if d == nil {
			continue
		}
		n++
		if n > most {
			continue
		}
		text += fmt.Sprintf(" %s, %s against %s: %s.", c.Grouping, c.Focal, c.Reference, fixed(d, 2))
	}
	if text == "" {
		return "With the numbers available here even large differences would usually go unseen."
	}
	if n > most {
		text += " The sections give it for the other comparisons."
	}
	return "With the numbers available here, differences smaller than the following D-DIF would usually be missed (middle of all items, 80 % power)." + text
}

func medianDetectable(c *exposedComparison) *float64 {
	var all []float64
	for i := range c.findings {
		if mh := c.findings[i].MantelHaenszel(); mh != nil && mh.DetectableDelta != nil && !math.IsNaN(*mh.DetectableDelta) {
			all = append(all, *mh.DetectableDelta)
		}
	}
	if len(all) == 0 {
		return nil
	}
	slices.Sort(all)
	m := all[len(all)/2]
	if len(all)%2 == 0 {
		m = (m + all[len(all)/2-1]) / 2
	}
	return &m
}

// notStatedText says how many candidates gave no label, per grouping.
func notStatedText(x *exposed) string {
	text := ""
	var seen []string
	for i := range x.comparisons {
		c := &x.comparisons[i]
		if slices.Contains(seen, c.Grouping) || len(seen) == 6 {
			continue
		}
		seen = append(seen, c.Grouping)
		switch {
		case c.notStated.hiding != visible:
			text += fmt.Sprintf(" %s was not stated by some (number %s).", c.Grouping, hiddenWord(c.notStated))
		case c.notStated.n == 0:
			text += fmt.Sprintf(" %s was stated by all.", c.Grouping)
		default:
			text += fmt.Sprintf(" %s was not stated by %s (%s).", c.Grouping, c.notStated, percent(c.notStated.n, x.inputs.CandidatesAnalysed))
		}
	}
	if text == "" {
		return ""
	}
	return "Here:" + text
}

func hiddenWord(c count) string {
	if c.hiding == few {
		return "below 10"
	}
	return "withheld"
}
