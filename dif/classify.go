package dif

import "math"

// Letters of the ETS scale. The sign is the direction: minus harder, plus easier for the focal group.
const (
	ClassA      = "A"
	ClassBMinus = "B-"
	ClassBPlus  = "B+"
	ClassCMinus = "C-"
	ClassCPlus  = "C+"
)

// Letters lists the classes of dichotomous items in report order.
func Letters() []string { return []string{ClassA, ClassBMinus, ClassBPlus, ClassCMinus, ClassCPlus} }

// Limits of the letters on the delta scale.
const (
	limitB = 1.0
	limitC = 1.5
)

// Letter returns the ETS class of a D-DIF value with its standard error and the
// p-value of the test of no difference, on unrounded values:
//
//	A  if p >= alpha or |Δ| < 1
//	C  if p < alpha, |Δ| >= 1.5 and (|Δ| − 1)/SE > 1.645 (one-sided 5 % test of |Δ| > 1)
//	B  otherwise
//
// It returns false where a value does not exist or SE is not positive. Sources: Dorans &
// Holland (1993); Zieky (1993); Zwick (2012), ETS RR-12-08.
func Letter(delta, se, p, alpha float64) (string, bool) {
	size := math.Abs(delta)
	if !(se > 0) || math.IsInf(se, 0) || math.IsInf(size, 0) || math.IsNaN(size) || math.IsNaN(p) {
		return "", false
	}
	sign := "+"
	if delta < 0 {
		sign = "-"
	}
	switch {
	case p >= alpha || size < limitB:
		return ClassA, true
	case size >= limitC && (size-limitB)/se > z95:
		return "C" + sign, true
	}
	return "B" + sign, true
}

// isC reports whether a letter takes an item out of the matching score.
func isC(letter string) bool { return letter == ClassCMinus || letter == ClassCPlus }

// chanceOfLetters returns the probabilities of B or C, and of C, for an item whose true
// D-DIF is 0, by the normal approximation with the p-value taken from the same estimate.
func chanceOfLetters(se, alpha float64) (bOrC, c float64) {
	z := normalQuantile(1-alpha/2) * se
	bOrC = 2 * normalTail(math.Max(limitB, z)/se)
	c = 2 * normalTail(math.Max(math.Max(limitC, limitB+z95*se), z)/se)
	return bOrC, c
}

// Reasons for no verdict, in the order in which the first that applies is given.
const (
	ReasonKeyMissing         = "key_missing"
	ReasonNotPresented       = "not_presented"
	ReasonNoVariation        = "no_variation"
	ReasonNoVariationInGroup = "no_variation_in_group"
	ReasonNoScoreOverlap     = "no_score_overlap"
	ReasonTooFewCandidates   = "too_few_candidates"
	ReasonTooFewInformative  = "too_few_informative"
	ReasonNotEstimable       = "not_estimable"
	ReasonNotConverged       = "not_converged"
	ReasonWithheldForPrivacy = "withheld_for_privacy" // in exports only
	minimumInformative       = 20
)

// Reasons lists the no-verdict reasons in their order.
func Reasons() []string {
	return []string{ReasonKeyMissing, ReasonNotPresented, ReasonNoVariation, ReasonNoVariationInGroup, ReasonNoScoreOverlap,
		ReasonTooFewCandidates, ReasonTooFewInformative, ReasonNotEstimable, ReasonNotConverged, ReasonWithheldForPrivacy}
}

// Details of a missing letter.
const (
	DetailNoKey               = "no_key"
	DetailNoResponses         = "no_scored_responses"
	DetailInfiniteOddsRatio   = "infinite_odds_ratio"
	DetailNoInformativeStrata = "no_informative_strata"
	DetailMethodNotAvailable  = "method_not_available"
	DetailNoClassifyingMethod = "no_classifying_method"
)

// noVerdict returns the first reason that applies before any statistic is looked at,
// or "" when there is none.
func (c coverage) noVerdict(keyed bool, criteria Criteria) string {
	smaller, total := min(c.matched[0], c.matched[1]), c.matched[0]+c.matched[1]
	switch {
	case !keyed:
		return ReasonKeyMissing
	case c.n[0] == 0 || c.n[1] == 0:
		return ReasonNotPresented
	case min(c.lowest[0], c.lowest[1]) == max(c.highest[0], c.highest[1]):
		return ReasonNoVariation
	case c.lowest[0] == c.highest[0] || c.lowest[1] == c.highest[1]:
		return ReasonNoVariationInGroup
	case c.comparable == 0:
		return ReasonNoScoreOverlap
	case smaller < criteria.MinSmallerGroup || total < criteria.MinTotal:
		return ReasonTooFewCandidates
	case c.informativeN < minimumInformative:
		return ReasonTooFewInformative
	}
	return ""
}
