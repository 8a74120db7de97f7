package reports

import (
	"regexp"
	"strings"
	"testing"

	"difaudit/dif"
)

func comparisonWith(classes, noVerdict dif.Counts) *exposedComparison {
	c := &exposedComparison{}
	c.Summary.Classes, c.Summary.NoVerdict = classes, noVerdict
	c.findings = make([]exposedFinding, classes.Total()+noVerdict.Total())
	return c
}

func TestHeadlineCountsInWholeSentences(t *testing.T) {
	t.Parallel()
	for want, c := range map[string]*exposedComparison{
		"Of 24 items, none was lettered C and 1 was lettered B.": comparisonWith(dif.Counts{{Name: "A", N: 23}, {Name: "B-", N: 1}}, nil),
		"Of 24 items, 1 was lettered C and 2 were lettered B.":   comparisonWith(dif.Counts{{Name: "A", N: 21}, {Name: "C+", N: 1}, {Name: "B-", N: 2}}, nil),
		"Of 1 item, none was lettered B or C.":                   comparisonWith(dif.Counts{{Name: "A", N: 1}}, nil),
		"The item could be given no letter: no variation (1).":   comparisonWith(nil, dif.Counts{{Name: dif.ReasonNoVariation, N: 1}}),
		"There are no items.":                                    comparisonWith(nil, nil),
	} {
		if got := c.headline(); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}

// badCount finds counts that do not agree with their noun or verb.
var badCount = regexp.MustCompile(`(?i)(^|[^0-9.,])(1 (items|tests|comparisons|candidates|records|sets|findings|letters|were|have|stand)|0 (were|was|item|test)|[02-9] (item|test|comparison|candidate|record|set|was|has))([.,;:)]|$| (was|were|could|have|has|with|is|are))`)

func TestChanceInWholeSentences(t *testing.T) {
	t.Parallel()
	for _, n := range []int{1, 2} {
		c := comparisonWith(dif.Counts{{Name: "A", N: n}}, nil)
		c.Summary.ExpectedByChance = dif.ExpectedChance{BOrC: 0.04, Tests: n, Significant: 0.05 * float64(n)}
		text := c.chanceText(0.05) + " " + c.headline()
		for _, k := range cautions(&exposed{comparisons: []exposedComparison{*c}, inputs: dif.Inputs{CandidatesAnalysed: 1, Items: make([]dif.ItemSummary, 1)}}) {
			text += " " + k.text
		}
		if bad := badCount.FindString(text); bad != "" {
			t.Errorf("%q in %q", bad, text)
		}
	}
}

// Letter A is no finding of absence.
func TestNothingIsSaidToBeAbsent(t *testing.T) {
	t.Parallel()
	r := &report{}
	text := r.question()
	for _, h := range outcomeHeads {
		text += " " + h.long
	}
	for _, claim := range []string{"none or", "no DIF", "small one", "negligible"} {
		if strings.Contains(text, claim) {
			t.Errorf("%q in %q", claim, text)
		}
	}
	if want := "no difference that it treats as important (not significant, or below 1.0 in size)"; !strings.Contains(text, want) {
		t.Errorf("%q is missing in %q", want, text)
	}
}

func TestMatchingIsDescribedForEveryComparison(t *testing.T) {
	t.Parallel()
	on := func(variables ...string) *report {
		r := &report{x: &exposed{plan: dif.DefaultPlan()}}
		for _, v := range variables {
			c := exposedComparison{}
			c.Matching.Variable = v
			r.x.comparisons = append(r.x.comparisons, c)
		}
		return r
	}
	r := on(dif.MatchTotal, dif.MatchTotalWithinSet, dif.MatchTotal)
	got := r.matchingVariables()
	if len(got) != 2 || got[0].where() != "comparisons 1, 3" || got[1].where() != "comparison 2" || got[1].variable != dif.MatchTotalWithinSet {
		t.Errorf("%+v", got)
	}
	if text := r.refinementText(got); !strings.HasPrefix(text, "Two stages") {
		t.Errorf("%q", text)
	}
	r = on(dif.MatchExternal, dif.MatchExternal)
	if text := r.refinementText(r.matchingVariables()); !strings.HasPrefix(text, "One stage") || strings.Contains(text, "Two stages") {
		t.Errorf("%q", text)
	}
	r = on(dif.MatchTotal, dif.MatchExternal)
	if text := r.refinementText(r.matchingVariables()); !strings.Contains(text, "In comparison 2: One stage") || !strings.Contains(text, "Two stages") {
		t.Errorf("%q", text)
	}
}

// Words in the interval plot are never cut, however long reasons and causes are.
func TestReasonsInThePlotAreWhole(t *testing.T) {
	t.Parallel()
	d := newDocument("", "", reportOptions.Date, nil)
	d.addPage(false)
	texts := []string{}
	for _, reason := range dif.Reasons() {
		texts = append(texts, "(C-) "+shortReason(reason))
		for _, detail := range detailWords {
			texts = append(texts, shortReason(reason)+": "+detail)
		}
	}
	for _, text := range texts {
		for _, width := range []float64{intervalVerdict, 60} {
			lines, s := d.uncut(text, style{size: 7, ink: ink}, width)
			if got := strings.Join(lines, " "); got != text {
				t.Errorf("%q in %v mm is %q", text, width, got)
			}
			if len(lines) > 2 || float64(len(lines))*s.size*0.3528*1.1 > intervalRowHeight {
				t.Errorf("%q takes %d lines of %.1f points, more than a row holds", text, len(lines), s.size)
			}
			if width == 60 && s.size < 5 {
				t.Errorf("%q is set in %.1f points", text, s.size)
			}
			for _, line := range lines {
				if d.widthOf(line, s) > width {
					t.Errorf("%q is wider than %v mm", line, width)
				}
			}
		}
	}
}
