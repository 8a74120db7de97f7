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
		if p != nil && *p > veryEasy {
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

// warn lists what a reader of the comparison must know.
func (k *comparing) warn(notStated int) {
	add := func(code, format string, args ...any) {
		k.out.Warnings = append(k.out.Warnings, Warning{code, fmt.Sprintf(format, args...)})
	}
	shares := k.out.Groups.lostShares()
	for g, name := range []string{"reference", "focal"} {
		if shares[g] > lostWarning {
			advice := "consider a wider matching variable"
			if len(k.packed.sets) > 1 {
				advice = "consider matching within form (total_within_form)"
			}
			add(WarnCandidatesLost, "%.1f %% of the %s group leave the analysis: their matching level holds nobody of the other group; %s.",
				100*shares[g], name, advice)
		}
	}
	if shares[1] > focalLostWarning {
		add(WarnFocalLost, "Over %.0f %% of the focal candidates have no match among the reference group; one score a level is too fine for these numbers.",
			100*focalLostWarning)
	}
	m := &k.out.Matching
	if m.Reliability != nil && *m.Reliability < lowReliability {
		add(WarnLowReliability, "The matching score has a coefficient alpha of %.3f, below %.2f: group differences in ability leak into the results.", *m.Reliability, lowReliability)
	}
	if d := k.out.Groups.Difference; d != nil && math.Abs(*d) > largeDifference {
		add(WarnLargeGroupDifference, "The groups differ by %.2f standard deviations in the matching score: matching is less exact.", *d)
	}
	if k.refused {
		add(WarnPurificationRefused, "Leaving out the items classed C would keep fewer than half, or fewer than %d, of the matching items: all were kept.", fewestMatching)
	}
	if n := min(k.moments[0].n, k.moments[1].n); notStated > n {
		add(WarnNotStated, "More candidates did not state %s than the smaller group holds: the result may depend on who answered.", k.out.Grouping)
	}
	if k.variable == MatchTotal && k.packed.partial > 0 {
		add(WarnSetsPooled, "Not everybody was presented the same items, and the plan asks for one total: items not presented add nothing to it.")
	}
	unscored := 0
	for i := range k.data.Items {
		if _, planes := k.packed.itemPlanes(i); planes == 0 && k.data.Items[i].KeyMissing {
			unscored++
		}
	}
	if unscored > 0 {
		add(WarnUnscoredItems, "%s without a key not scored; candidates are matched on %s.", counted(unscored, "item", "items"), counted(len(k.matching), "item", "items"))
	}
}

func counted(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// lostShares returns, by group, the share of labelled candidates at matching levels
// without the other group.
func (g *Groups) lostShares() [2]float64 {
	return [2]float64{ratio(g.Reference.Unmatched, g.Reference.N), ratio(g.Focal.Unmatched, g.Focal.N)}
}

// Lost is a share of candidates who left the analysis, large enough to be said before
// any result.
type Lost struct {
	Comparison string // "grouping reference/focal", or empty for the whole audit
	Share      float64
	Why        string
}

// LostCandidates returns every share above 2 %, the whole audit first, then the
// comparisons in order.
func (e *Evidence) LostCandidates() []Lost {
	var lost []Lost
	for _, x := range e.Inputs.Exclusions {
		share := ratio(x.Count, e.Inputs.CandidatesReceived)
		if x.Reason == ExcludedNoExternalScore && x.Grouping == nil && share > announceLostShare {
			lost = append(lost, Lost{Share: share, Why: "they have no external score"})
		}
	}
	for i := range e.Comparisons {
		c := &e.Comparisons[i]
		g := &c.Groups
		share := ratio(g.Reference.Unmatched+g.Focal.Unmatched, g.Reference.N+g.Focal.N)
		if share > announceLostShare {
			lost = append(lost, Lost{
				Comparison: fmt.Sprintf("%s %s/%s", c.Grouping, c.Reference, c.Focal), Share: share,
				Why: "nobody of the other group stands at their matching level",
			})
		}
	}
	return lost
}
