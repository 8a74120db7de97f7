package dif

import (
	"fmt"
	"math"
)

// Codes of warnings on a finding.
const (
	WarnDirectionWithoutLimit = "direction_without_limit"
	WarnLargeNotExcluded      = "large_difference_not_excluded"
	WarnNonUniform            = "non_uniform"
	WarnBreslowDaySparse      = "breslow_day_sparse"
	WarnFocalUnmatched        = "focal_candidates_unmatched"
	WarnLetterDependsOnTest   = "letter_depends_on_correction"
	WarnVeryEasy              = "very_easy"
	WarnLowItemRest           = "low_item_rest_correlation"
	WarnNegativeItemRest      = "negative_item_rest_correlation"
)

// Codes of warnings on a comparison.
const (
	WarnCandidatesLost       = "candidates_lost"
	WarnFocalLost            = "focal_candidates_lost"
	WarnLowReliability       = "low_reliability"
	WarnLargeGroupDifference = "large_group_difference"
	WarnPurificationRefused  = "purification_not_applied"
	WarnNotStated            = "not_stated_exceeds_group"
	WarnSetsPooled           = "presented_sets_pooled"
	WarnUnscoredItems        = "items_without_key"
)

// Limits of the warnings. All are common practice, none decides a letter.
const (
	lostWarning       = 0.05 // of either group, leaving the analysis
	focalLostWarning  = 0.10
	lowReliability    = 0.70
	largeDifference   = 0.5 // pooled standard deviations
	nonUniformLevel   = 0.05
	sparseMedian      = 20 // candidates of a stratum
	veryEasy          = 0.95
	lowItemRest       = 0.10
	announceLostShare = 0.02
)

// warnings lists what a reader of the finding must know.
func (f *Finding) warnings(c *coverage, criteria Criteria) []Warning {
	w := []Warning{}
	add := func(code, format string, args ...any) { w = append(w, Warning{code, fmt.Sprintf(format, args...)}) }
	k := &f.Classification
	if mh := f.MantelHaenszel(); mh != nil {
		if mh.ChiSquare != nil && mh.Delta == nil {
			add(WarnDirectionWithoutLimit, "The odds ratio is %s without limit: no finite D-DIF exists. The chi-square and the standardized difference still hold.", c.limitDirection())
		}
		if k.Class != nil && *k.Class == ClassA && mh.DeltaLow != nil && (*mh.DeltaLow <= -limitC || *mh.DeltaHigh >= limitC) {
			add(WarnLargeNotExcluded, "The interval of D-DIF reaches -1.5 or 1.5 or beyond: a large difference is not excluded.")
		}
		if k.ComputedClass != nil && k.ClassIfCorrected != nil && *k.ComputedClass != *k.ClassIfCorrected {
			add(WarnLetterDependsOnTest, "With the continuity-corrected chi-square the letter would be %s.", *k.ClassIfCorrected)
		}
		if k.ComputedClass != nil && criteria.ContinuityCorrection {
			if plain := letterOf(mh, mh.PValue, criteria.ClassAlpha); plain != nil && *plain != *k.ComputedClass {
				add(WarnLetterDependsOnTest, "With the uncorrected chi-square the letter would be %s.", *plain)
			}
		}
	}
	if bd := f.BreslowDay(); bd != nil && bd.Statistic != nil {
		if bd.Trend.PValue != nil && *bd.Trend.PValue < nonUniformLevel {
			add(WarnNonUniform, "The odds ratio changes with the matching score: the average over levels can hide differences.")
		}
		if c.medianT < sparseMedian {
			add(WarnBreslowDaySparse, "Half of the matching levels hold fewer than %d candidates: the Breslow-Day chi-square is rough.", sparseMedian)
		}
	}
	if lost := 1 - ratio(c.matched[1], c.n[1]); lost > focalLostWarning {
		add(WarnFocalUnmatched, "%.0f %% of the focal candidates stand at scores without a reference candidate and are left out.", 100*lost)
	}
	for _, p := range []*float64{f.PReference, f.PFocal} {
		if p != nil && *p > veryEasy && k.ComputedClass != nil {
			add(WarnVeryEasy, "Over %.0f %% of a group answered correctly: read D-DIF beside the standardized difference.", 100*veryEasy)
			break
		}
	}
	for _, r := range []*float64{f.ItemRest.Reference, f.ItemRest.Focal} {
		if r == nil || *r >= lowItemRest {
			continue
		}
		if *r < 0 {
			add(WarnNegativeItemRest, "The item goes against the rest of the test in a group: check key and scoring.")
		} else {
			add(WarnLowItemRest, "The item hardly goes with the rest of the test in a group (item-rest correlation below %.2f).", lowItemRest)
		}
		break
	}
	return w
}

// limitDirection words the direction of an odds ratio without limit.
func (c *coverage) limitDirection() string {
	if c.direction > 0 {
		return "in favour of the focal group"
	}
	return "in favour of the reference group"
}

// comparisonFacts are what the warnings of a comparison need beside the comparison itself.
type comparisonFacts struct {
	forms    bool // the data name the form of each candidate
	pooled   bool // candidates were presented less than others of their set
	refused  bool // purification would have left too few items
	unscored int  // items without a key
	matching int  // items of the stage-1 score
}

// warn lists what a reader of the comparison must know.
func (k *comparing) warn() {
	x := comparisonFacts{forms: k.data.FormOf != nil, pooled: k.packed.pooled > 0, refused: k.refused, matching: len(k.matching)}
	for i := range k.data.Items {
		if _, planes := k.packed.itemPlanes(i); planes == 0 {
			x.unscored++
		}
	}
	k.out.Warnings = k.out.due(x)
}

// due returns the warnings that follow from a comparison, in their order.
func (c *Comparison) due(x comparisonFacts) []Warning {
	w := []Warning{}
	add := func(code, format string, args ...any) { w = append(w, Warning{code, fmt.Sprintf(format, args...)}) }
	shares := c.Groups.lostShares()
	for g, name := range []string{"reference", "focal"} {
		if shares[g] > lostWarning {
			add(WarnCandidatesLost, "%.1f %% of the %s group leave the analysis: %s; %s.", 100*shares[g], name, c.whyLost(), c.adviceOnLoss(x.forms))
		}
	}
	if shares[1] > focalLostWarning {
		add(WarnFocalLost, "Over %.0f %% of the focal candidates are not compared: the result may not hold for the whole group.", 100*focalLostWarning)
	}
	m := &c.Matching
	if m.Reliability != nil && *m.Reliability < lowReliability {
		add(WarnLowReliability, "The matching score has a coefficient alpha of %.3f, below %.2f: group differences in ability leak into the results.", *m.Reliability, lowReliability)
	}
	if d := c.Groups.Difference; d != nil && math.Abs(*d) > largeDifference {
		add(WarnLargeGroupDifference, "The groups differ by %.2f standard deviations in the matching score: matching is less exact.", *d)
	}
	if x.refused {
		add(WarnPurificationRefused, "Leaving out the items classed C would keep fewer than half, or fewer than %d, of the matching items: all were kept.", fewestMatching)
	}
	if c.Groups.NotStated > min(c.Groups.Reference.N, c.Groups.Focal.N) {
		add(WarnNotStated, "More candidates did not state %s than the smaller group holds: the result may depend on who answered.", c.Grouping)
	}
	if (m.Variable == MatchTotal || m.Variable == MatchTotalWithinForm) && x.pooled {
		where := ""
		if m.Variable == MatchTotalWithinForm {
			where = " of their form"
		}
		add(WarnSetsPooled, "Some candidates were not presented every item%s, and the plan asks for one total: an item not presented adds nothing to it, as if it had been answered wrong.", where)
	}
	if x.unscored > 0 {
		add(WarnUnscoredItems, "%s without a key not scored; candidates are matched on %s.", counted(x.unscored, "item", "items"), counted(x.matching, "item", "items"))
	}
	return w
}

func counted(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

const lostUnmatched = "nobody of the other group stands at their matching level"

// whyLost words why labelled candidates are not compared.
func (c *Comparison) whyLost() string {
	if c.Groups.Reference.NoScore+c.Groups.Focal.NoScore > 0 {
		return lostUnmatched + ", or they have no external score"
	}
	return lostUnmatched
}

// adviceOnLoss names what would keep more candidates.
func (c *Comparison) adviceOnLoss(forms bool) string {
	switch {
	case c.Matching.Variable == MatchExternal:
		return "give the score to more candidates, or round it to fewer distinct values"
	case c.Matching.Variable == MatchTotalWithinSet && forms:
		return "consider matching within form (total_within_form)"
	case c.Matching.Variable == MatchTotalWithinSet:
		return "if candidates sat fixed forms, name them in a form column and match within form (total_within_form)"
	}
	return "one score a level is fine-grained for these numbers; more candidates at the same scores would be compared with larger groups"
}

// lostShares returns, by group, the share of labelled candidates who are not compared.
func (g *Groups) lostShares() [2]float64 {
	share := func(g *Group) float64 { return ratio(g.Unmatched+g.NoScore, g.N+g.NoScore) }
	return [2]float64{share(&g.Reference), share(&g.Focal)}
}

// Lost is a share of candidates of one comparison who left the analysis, large enough
// to be said before any result.
type Lost struct {
	Comparison       string // "grouping reference/focal"
	Share            float64
	Reference, Focal float64 // shares of each group
	Why              string
}

// LostCandidates returns the comparisons, in order, in which over 2 % of the candidates of
// both groups together, or of one group, left the analysis.
func (e *Evidence) LostCandidates() []Lost {
	var lost []Lost
	for i := range e.Comparisons {
		c := &e.Comparisons[i]
		r, f := &c.Groups.Reference, &c.Groups.Focal
		shares := c.Groups.lostShares()
		l := Lost{
			Comparison: fmt.Sprintf("%s %s/%s", c.Grouping, c.Reference, c.Focal), Reference: shares[0], Focal: shares[1], Why: c.whyLost(),
			Share: ratio(r.Unmatched+f.Unmatched+r.NoScore+f.NoScore, r.N+f.N+r.NoScore+f.NoScore),
		}
		if max(l.Share, l.Reference, l.Focal) > announceLostShare {
			lost = append(lost, l)
		}
	}
	return lost
}
